"""`python -m cardgen`."""

from cardgen.cli.main import main

main()
