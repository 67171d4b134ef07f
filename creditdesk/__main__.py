"""Run the command line as ``python -m creditdesk``."""

import sys

from creditdesk.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
