"""`python -m front3d` is the command `front3d`."""

import sys

from front3d.cli import main

if __name__ == "__main__":
    sys.exit(main())
