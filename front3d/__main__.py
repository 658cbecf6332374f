"""`python -m front3d` is the command `front3d`."""

import sys

from front3d.cli import process

if __name__ == "__main__":
    sys.exit(process())
