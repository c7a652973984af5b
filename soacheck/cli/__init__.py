"""The command line: arguments in, one library call, one rendering out, the exit status.

Commands return what is to be printed; `main` alone writes to standard output, so that a broken pipe or a full
disk is seen in one place. `--version` needs neither numpy nor the command parser.
"""

from soacheck.cli.process import main

__all__ = ["main"]
