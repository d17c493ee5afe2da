"""`python -m sitesym` is the command `sitesym`."""

import sys

from sitesym.cli import main

if __name__ == "__main__":
    sys.exit(main())
