"""Where bytes go: a whole new file or none at all."""

from __future__ import annotations

import errno
import os
import stat
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from typing import IO, NamedTuple

from ..errors import InputError

__all__ = ["Target", "check_target", "replacing"]

FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)


class Target(NamedTuple):
    """What a format writes to.

    Attributes
    ----------
    stream : binary stream
    path : str or None
        The same file by name, for libraries that want one; None where there is only a stream.
    suffix : str
        The suffix of the file, or the empty string.
    compress : bool
    gluing : bool
        Whether a triangulation is to be written as a gluing table although a facet list would say it all.
    """

    stream: IO[bytes]
    path: str | None = None
    suffix: str = ""
    compress: bool = False
    gluing: bool = False


@contextmanager
def replacing(path: str, force: bool) -> Iterator[tuple[IO[bytes], str | None]]:
    """A new file that takes the place of `path` when the block ends well, and leaves no trace otherwise.

    Gives the stream to write to, and its path where it is an ordinary file.  A pipe or a device is written to
    as it is.

    Raises
    ------
    InputError
        If the file exists and `force` is false, or it cannot be written.
    """
    try:
        check_target(path, force)
        if _special(path):
            with open(path, "wb") as stream:
                yield stream, None
            return
        real = os.path.realpath(path)
        folder, base = os.path.split(real)
        temporary = os.path.join(folder, f".{base[:100]}.{os.getpid()}-{os.urandom(4).hex()}.part")
        # created as any new file is, so that the umask holds
        handle = os.open(temporary, os.O_RDWR | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0), 0o666)
        try:
            with os.fdopen(handle, "w+b") as stream:
                yield stream, temporary
                stream.flush()
                os.fsync(stream.fileno())
                with suppress(OSError):
                    os.chmod(temporary, stat.S_IMODE(os.stat(real).st_mode))
            check_target(path, force)
            os.replace(temporary, real)
        except BaseException:
            with suppress(OSError):
                os.unlink(temporary)
            raise
        _sync_folder(folder)
    except BrokenPipeError:
        raise
    except OSError as error:
        raise _unwritable(path, error) from None
    except ValueError as error:
        if "null" not in str(error):
            raise
        raise InputError("no file can have this name", repr(path)) from None


def check_target(path: str, force: bool) -> None:
    """Refuse a path that `replacing` would refuse; to be asked before long work.

    Raises
    ------
    InputError
    """
    if os.path.isdir(path):
        raise InputError("this is a directory, not a file", path, "name a file in it")
    if os.path.lexists(path) and not force and not _special(path):
        raise InputError(
            "the file exists already", path, "give another name, or overwrite it: --force, force=True"
        )


def _special(path: str) -> bool:
    """Whether the path leads to a pipe or a device."""
    return os.path.exists(path) and not os.path.isfile(path) and not os.path.isdir(path)


def _unwritable(path: str, error: OSError) -> InputError:
    kind = error.errno
    if kind in FULL or any(f"errno = {n}," in str(error) for n in FULL):
        return InputError(
            "there is no room for the file; nothing was written", path, "make room, or write elsewhere"
        )
    if isinstance(error, FileNotFoundError):
        return InputError("there is no such directory", os.path.dirname(path) or path, "make it first")
    if isinstance(error, PermissionError) or kind == errno.EROFS:
        return InputError("the file may not be written", path, "change the permissions, or write elsewhere")
    return InputError(f"the file cannot be written: {error.strerror or error}", path)


def _sync_folder(folder: str) -> None:
    """Make the new name itself last through a power cut, where the system can."""
    with suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
