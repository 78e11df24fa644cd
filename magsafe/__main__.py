"""The console script. `--version` is answered before anything else is imported."""

import errno
import gc
import os
import sys
from contextlib import suppress

from magsafe import __version__

_FAULT = 70


def say(text: str) -> None:
    """Write to standard error what its encoding can hold, if there is one."""
    if sys.stderr is None:
        return
    encoding = sys.stderr.encoding or "ascii"
    with suppress(OSError):
        sys.stderr.write(text.encode(encoding, "backslashreplace").decode(encoding))


def main() -> None:
    """Run the command line; a fault of the program leaves with 70, never with the 1 that means stop."""
    if sys.argv[1:] == ["--version"]:
        # A reader that has closed, or no standard output at all, is no fault.
        with suppress(BrokenPipeError, AttributeError):
            sys.stdout.write(f"magsafe {__version__}\n")
            sys.stdout.flush()
        return
    # A command lives a second: collecting cycles while it imports costs a tenth of that and frees nothing. Plug-ins
    # of the validation library are other people's code, and looking for them takes time too.
    gc.disable()
    os.environ.setdefault("PYDANTIC_DISABLE_PLUGINS", "__all__")
    # Matrices of a hundred unknowns gain nothing from more threads, and on a busy machine threads that wait for each
    # other cost ten times the work.
    for threads in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(threads, "1")
    from magsafe.cli.app import run  # noqa: PLC0415  (not needed for --version)

    debug = "--debug" in sys.argv
    try:
        run([argument for argument in sys.argv[1:] if argument != "--debug"])
    except Exception as fault:
        if debug:
            raise
        if isinstance(fault, OSError) and fault.errno in (errno.ENOSPC, errno.EIO):
            say(f"magsafe: the output could not be written ({fault.strerror}). Nothing was proven.\n")
            sys.exit(2)
        kind = type(fault).__name__
        say(
            f"magsafe: a fault of the program, not of the design ({kind}: {fault}).\n"
            "Nothing was proven. Run the same command with --debug and report what it prints.\n"
        )
        sys.exit(_FAULT)


if __name__ == "__main__":
    main()
