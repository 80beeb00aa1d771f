"""``python -m steplaw``: the same as the ``steplaw`` command."""

from steplaw.cli import main

main()
