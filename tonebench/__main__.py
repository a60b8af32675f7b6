"""``python -m tonebench`` is the same as the ``tonebench`` command."""

from tonebench.cli.main import main

if __name__ == "__main__":
    raise SystemExit(main())
