"""The command line: ``python -m engine --help``."""

import sys

from engine.job.commands import main

if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
