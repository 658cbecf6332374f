"""From the words of a call to an exit code: 0, 1 for a wrong input, 2 for a wrong call."""

import os
import sys
import traceback
from collections.abc import Sequence

from front3d.cli.flags import join_negative_values
from front3d.cli.parser import build_parser
from front3d.errors import Front3DError

_INTERRUPTED = 130  # as shells report it: 128 + SIGINT


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code; no traceback unless `--debug` asks for it."""
    words = join_negative_values(sys.argv[1:] if argv is None else argv)
    debug = "--debug" in words
    try:
        parser = build_parser(words)
        arguments = parser.parse_args(words)
        code = int(arguments.run(arguments))
        sys.stdout.flush()
        return code
    except SystemExit as ended:  # argparse: 0 after help, 2 for a wrong call
        return ended.code if isinstance(ended.code, int) else 2
    except Front3DError as error:
        _show_debug(debug)
        return _fail(str(error))
    except KeyboardInterrupt:
        return _INTERRUPTED
    except BrokenPipeError:
        # The reader of our words has gone (`| head`); files were written before any word. What
        # is still buffered goes nowhere, or the interpreter would complain at its end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except MemoryError:
        _show_debug(debug)
        return _fail("not enough memory for this model; try a machine with more of it")
    except OSError as error:
        _show_debug(debug)
        place = error.filename or "standard output"
        return _fail(
            f"{place}: {(error.strerror or str(error)).lower()}; free some space, or check "
            "what you may read and write"
        )
    except Exception as error:
        _show_debug(debug)
        hint = "" if debug else "; run again with --debug for the details, and please report them"
        return _fail(f"unexpected {type(error).__name__}: {' '.join(str(error).split())}{hint}")


def _fail(message: str) -> int:
    print(f"front3d: {message}", file=sys.stderr)
    return 1


def _show_debug(debug: bool) -> None:
    if debug:
        traceback.print_exc()
