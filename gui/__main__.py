"""`python -m gui`: the same as `digitise window`."""

import sys

from digitise.cli import main

if __name__ == "__main__":
    sys.exit(main(["window", *sys.argv[1:]]))
