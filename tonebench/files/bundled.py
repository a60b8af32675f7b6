"""What comes with the bench, and what a name or path on the command line means.

The presets and clips lie at the top of a checkout, and in ``tonebench/bundled`` of an installed wheel.
"""

import difflib
import re
from dataclasses import dataclass
from pathlib import Path

from tonebench.errors import StorageError

_PACKAGE = Path(__file__).resolve().parent.parent
_CLIP_SUFFIXES = (".flac", ".wav", ".ogg")
# The first bytes of what libsndfile reads most; anything else is tried by libsndfile itself in clips.py.
_AUDIO_MAGIC = (b"RIFF", b"RF64", b"fLaC", b"OggS", b"FORM", b".snd", b"caff", b"ID3", b"riff")
STARTING_CLIP = "boathouse"


@dataclass(frozen=True, slots=True)
class BundledItem:
    """A preset or clip that comes with the bench: ``name`` without suffix, its path, one line about it."""

    name: str
    path: Path
    description: str


def _folder(sort: str) -> Path:
    """Return the folder of ``presets`` or ``clips``, in the wheel or at the top of the checkout."""
    installed = _PACKAGE / "bundled" / sort
    return installed if installed.is_dir() else _PACKAGE.parent / sort


def bundled_presets() -> tuple[BundledItem, ...]:
    """Return the presets that come with the bench, by name; the description is the file's first comment."""
    paths = sorted(_folder("presets").glob("*.toml"))
    return tuple(BundledItem(path.stem, path, _first_comment(path)) for path in paths)


def bundled_clips() -> tuple[BundledItem, ...]:
    """Return the clips that come with the bench, by name; the description is the file's comment tag."""
    from tonebench.files.clips import describe_file  # noqa: PLC0415  (soundfile, only where clips are listed)

    return tuple(BundledItem(path.stem, path, describe_file(path)) for path in _clip_paths())


def _clip_paths() -> list[Path]:
    return sorted(path for path in _folder("clips").glob("*") if path.suffix in _CLIP_SUFFIXES)


def _first_comment(path: Path) -> str:
    words = []
    for line in path.read_text(encoding="utf-8").splitlines():
        if not line.startswith("#"):
            break
        words.append(line.lstrip("# ").strip())
    return " ".join(word for word in words if word)


def is_bundled(path: Path) -> bool:
    """Tell whether a path is one of the presets that come with the bench."""
    return path.resolve().parent == _folder("presets").resolve()


def find_preset(name: str) -> Path:
    """Return the path of a preset given as a path or a bundled name.

    Raises
    ------
    StorageError
        If it is neither.

    """
    paths = {path.stem: path for path in _folder("presets").glob("*.toml")}
    return _find(name, paths, "preset", "tonebench presets")


def find_clip(name: str) -> Path:
    """Return the path of a clip given as a path or a bundled name.

    Raises
    ------
    StorageError
        If it is neither.

    """
    return _find(name, {path.stem: path for path in _clip_paths()}, "clip", "tonebench clips")


def clip_for_preset(path: Path) -> Path:
    """Return the clip that suits a preset: the bundled one of the same first word, or else the boathouse."""
    clips = {clip.stem: clip for clip in _clip_paths()}
    wanted = re.split(r"[-_. ]", path.stem)[0]
    if wanted in clips and is_bundled(path):
        return clips[wanted]
    if STARTING_CLIP not in clips:
        raise StorageError("the clips that come with the bench are missing; give --clip FILE")
    return clips[STARTING_CLIP]


def _find(name: str, known: dict[str, Path], sort: str, listing: str) -> Path:
    path = Path(name) if name and "\0" not in name else None
    try:
        if path is not None and path.is_dir() and name not in known:
            raise StorageError(f"{name} is a folder; give a {sort} in it")
        if path is not None and path.exists() and not path.is_dir():
            return path
    except (OSError, ValueError) as error:
        if isinstance(error, StorageError):
            raise
        path = None  # a name no file system takes is only a bundled name, or none
    if name in known:
        return known[name]
    near = difflib.get_close_matches(name, known, n=1, cutoff=0.6)
    hint = f"did you mean {near[0]}?" if near else f"see {listing}"
    raise StorageError(f"{_shown(name)} is neither a file nor a bundled {sort}; {hint}")


def _shown(name: str) -> str:
    """Return a name that fits one line whatever is in it."""
    safe = name.encode("utf-8", "backslashreplace").decode("utf-8")
    plain = "".join(one if one.isprintable() else repr(one)[1:-1] for one in safe)
    return plain if len(plain) <= 80 and plain else repr(plain[:77] + "..." if plain else "")


def sniff(path: Path) -> str:
    """Tell what a file is by its content.

    Returns
    -------
    str
        ``"audio"``, ``"preset"`` (text that looks like TOML), ``"missing"`` or ``"other"``.

    """
    try:
        if not path.is_file():
            return "other" if path.exists() else "missing"
        with path.open("rb") as file:
            head = file.read(4096)
    except PermissionError:
        return "other"  # it is there: nobody may take its name for a new preset
    except (OSError, ValueError):
        return "missing"
    if head.startswith(_AUDIO_MAGIC) or head[:2] == b"\xff\xfb":
        return "audio"
    try:
        text = head.decode("utf-8", "strict" if len(head) < 4096 else "ignore")
    except UnicodeDecodeError:  # a .toml in another encoding is still meant as a preset, and refused as one
        return "preset" if path.suffix == ".toml" else _by_suffix(path)
    if re.search(r"^\s*(tonebench\s*=|\[\[?(chain|section)\]?\])", text, re.MULTILINE):
        return "preset"
    return "preset" if path.suffix == ".toml" else _by_suffix(path)


def _by_suffix(path: Path) -> str:
    """Let a name that promises audio be opened as audio, so that the complaint is about the audio."""
    return (
        "audio" if path.suffix.lower() in (".wav", ".flac", ".ogg", ".aif", ".aiff", ".mp3", ".w64", ".au") else "other"
    )
