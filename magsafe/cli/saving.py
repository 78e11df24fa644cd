"""Writing a file that somebody asked for: all of it or none, and never over another one unasked."""

import os
import secrets
from contextlib import suppress
from pathlib import Path

from magsafe.errors import CommandError


def require_writable(option: str, path: Path, *, replace: bool) -> None:
    """Raise CommandError where a file cannot be written; told before long computing starts.

    Parameters
    ----------
    option : the option that names the file, for the message
    path : the file
    replace : whether a file that is there may be replaced
    """
    try:
        there = path.lstat()
    except FileNotFoundError:
        there = None
    except (OSError, ValueError) as error:
        raise _unwritable(option, path, error) from None
    if there is not None and path.is_dir():
        raise CommandError(option, f"{path}, a directory", "the name of a file", "add a file's name")
    if there is not None and not replace:
        raise _exists(option, path)
    if not path.parent.is_dir():
        raise CommandError(
            option, f"{path}", "a file in a directory that exists", f"make the directory {path.parent} first"
        )
    trial = _aside(path)
    try:
        trial.open("xb").close()
    except OSError as error:
        raise _unwritable(option, path, error) from None
    finally:
        with suppress(OSError):
            trial.unlink()


def picture_file(option: str, name: str, *, replace: bool) -> Path:
    """Return the file of a picture that an option names; raise CommandError where it cannot be written."""
    path = Path(name)
    if path.suffix.lower() not in (".svg", ".png"):
        raise CommandError(option, repr(name), "a name that ends in .svg or .png", "write .svg")
    require_writable(option, path, replace=replace)
    return path


def save(option: str, path: Path, data: bytes, *, replace: bool) -> None:
    """Write a file so that nobody ever meets a part of it; with `replace` in the place of one that is there."""
    aside = _aside(path)
    try:
        with aside.open("xb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        if replace:
            with suppress(FileNotFoundError):
                aside.chmod(path.stat().st_mode & 0o7777)
            aside.replace(path)
        else:
            _put_where_nothing_is(aside, path)
    except FileExistsError:
        raise _exists(option, path) from None
    except OSError as error:
        raise _unwritable(option, path, error) from None
    finally:
        with suppress(OSError):
            aside.unlink()


def _put_where_nothing_is(aside: Path, path: Path) -> None:
    """Give a file its name, and raise FileExistsError where there is one of that name."""
    try:
        path.hardlink_to(aside)
    except FileExistsError:
        raise
    except OSError:
        # A file system without hard links: the name is taken first, so that two that write cannot both succeed.
        path.open("xb").close()
        aside.replace(path)


def _aside(path: Path) -> Path:
    return path.parent / f".magsafe-{secrets.token_hex(8)}.tmp"


def _exists(option: str, path: Path) -> CommandError:
    return CommandError(option, f"{path}, which exists", "a name that is free", "name another file, or add --replace")


def _unwritable(option: str, path: Path, error: Exception) -> CommandError:
    why = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
    return CommandError(option, f"{path}: {why}", "a file that can be written", "name another place")
