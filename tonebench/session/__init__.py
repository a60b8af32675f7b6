"""The state of a working session: preset, selection, undo, the typed line. No screen, no files."""
