"""The command line: argparse, one module per command, the only writer of stdout."""
