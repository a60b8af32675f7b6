"""The only opener of files: presets, clips, atomic writes, bundled material."""
