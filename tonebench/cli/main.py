"""Entry point: from arguments to an exit code.

Exit codes: 0 fine; 1 findings at or above the chosen severity; 2 bad input or usage. Whatever a user types or feeds
in ends in one plain line on stderr, never in a traceback. Only argparse is loaded until a command is known.
"""

import os
import sys

from tonebench.cli.parser import parse
from tonebench.errors import TonebenchError

EXIT_FINE = 0
EXIT_BAD_INPUT = 2
EXIT_INTERNAL = 70
EXIT_INTERRUPTED = 130


def main(arguments: list[str] | None = None) -> int:
    """Run one command and return its exit code."""
    try:
        parsed = parse(list(sys.argv[1:] if arguments is None else arguments))
        code = int(parsed.run(parsed))
        sys.stdout.flush()
    except TonebenchError as error:
        return _complain(str(error), EXIT_BAD_INPUT)
    except KeyboardInterrupt:
        return EXIT_INTERRUPTED
    except BrokenPipeError:
        # The reader of our output went away (a pager that was quit): nothing to say, and nothing left to flush.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return EXIT_FINE
    except Exception as error:
        if os.environ.get("TONEBENCH_TRACEBACK"):
            raise
        kind = type(error).__name__
        return _complain(
            f"internal error ({kind}: {error}); set TONEBENCH_TRACEBACK=1 to see where, and report it", EXIT_INTERNAL
        )
    return code


def _complain(message: str, code: int) -> int:
    line = " ".join(message.split())
    sys.stderr.write(f"tonebench: {line}\n")
    return code
