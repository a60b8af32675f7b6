"""One module per command: DESCRIPTION, EXAMPLE, ``add_arguments`` and ``run``; loaded only when it is named."""
