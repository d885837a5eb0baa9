"""`python -m settlelab` is the command line."""

from settlelab.cli import main

main()
