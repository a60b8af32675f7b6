"""The way in: opens the screen, and closes the engine whatever happens. Nothing here loads numpy."""

from tonebench.screen.app import BenchApp
from tonebench.screen.loading import Loader, Wanted

EXIT_INTERNAL = 70


def start(preset: str | None = None, clip: str | None = None, device: str | int | None = None) -> int:
    """Open the bench and return when it was left.

    Parameters
    ----------
    preset, clip : str or None
        As on the command line: a path or a bundled name.
    device : str, int or None
        For the engine: name, number or "silent".

    Returns
    -------
    int
        Exit code: 0, or 70 if the screen fell over.

    Raises
    ------
    TonebenchError
        If preset or clip cannot be used.

    """
    loader = Loader(Wanted(preset, clip, device))
    app = BenchApp(loader)
    try:
        app.run()
    finally:
        loader.close()
    if app.failure is not None:
        raise app.failure
    return EXIT_INTERNAL if app.return_code else 0
