"""``python -m seqcheck`` does what the command ``seqcheck`` does."""

import sys

from seqcheck.commandline import main

if __name__ == "__main__":
    sys.exit(main())
