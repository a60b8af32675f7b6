"""The way in: opens the screen, and closes the engine whatever happens. Nothing here loads numpy."""

import signal
import threading

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
        _finish_undisturbed()
        loader.close()
    if app.failure is not None:
        raise app.failure
    return EXIT_INTERNAL if app.return_code else 0


def _finish_undisturbed() -> None:
    """Let no second hangup cut the closing of the engine short: a closed window sends more than one."""
    if hasattr(signal, "SIGHUP") and threading.current_thread() is threading.main_thread():
        signal.signal(signal.SIGHUP, signal.SIG_IGN)
