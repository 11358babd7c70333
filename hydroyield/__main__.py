"""Start of the program: runs a command and turns errors into messages and exit codes.

Exit 0: done. 1: a fault of ours. 2: the input is at fault. 130: interrupted.
"""

from __future__ import annotations

import os
import sys
from typing import NoReturn

from hydroyield.errors import HydroyieldError, InputError

INTERRUPTED = 130  # as shells say it
DEBUG = "HYDROYIELD_DEBUG"  # set it to see the traceback of a fault of ours


def main() -> None:
    """Run the command line."""
    from hydroyield.cli import app

    try:
        app()
    except HydroyieldError as error:
        print(error, file=sys.stderr)
        sys.exit(2 if isinstance(error, InputError) else 1)
    except KeyboardInterrupt:
        _interrupted()
    except SystemExit as end:
        if end.code == INTERRUPTED:  # the command line library has caught it
            _interrupted()
        raise
    except BrokenPipeError:  # the reader of a pipe has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except Exception as error:
        if os.environ.get(DEBUG):
            raise
        print(
            f"a fault of hydroyield, not of your input: {type(error).__name__}: {error}; please "
            f"report it with the site file (set {DEBUG}=1 to see where it happened)",
            file=sys.stderr,
        )
        sys.exit(1)


def _interrupted() -> NoReturn:
    print("interrupted; nothing was written", file=sys.stderr)
    sys.exit(INTERRUPTED)


if __name__ == "__main__":
    main()
