"""Where the spawned process begins: it loads scipy only here, so that the screen's side never does."""

import signal
from multiprocessing.connection import Connection

from tonebench.engine.messages import Options


def run_child(connection: Connection, options: Options) -> None:
    """Run the engine in this process until the parent closes it."""
    # Ctrl-C goes to the whole group; only the parent answers it, and then closes this process.
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    from tonebench.engine.child import run  # noqa: PLC0415  (scipy)

    run(connection, options)
