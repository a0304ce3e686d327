"""`python -m loadpath`."""

from loadpath.cli import main

main()
