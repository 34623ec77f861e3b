"""A directory of files that appears whole or not at all."""

from __future__ import annotations

import os
import shutil
from collections.abc import Collection, Iterable, Iterator
from contextlib import suppress

from ..errors import InputError
from ..formats.target import replacing

__all__ = ["read_folder", "write_folder"]


def write_folder(
    path: str, files: Iterable[tuple[str, Iterator[bytes]]], names: Collection[str], force: bool
) -> None:
    """Write files into a new directory, which takes the place of `path` when all are complete.

    Parameters
    ----------
    path : str
    files : iterable of (str, iterator of bytes)
        Names and contents.
    names : collection of str
        The names that such a directory may hold; one with anything else in it is never replaced.
    force : bool
        Replace such a directory.

    Raises
    ------
    InputError
        If something is there and `force` is false, or it is not such a directory, or cannot be written.
    """
    base = os.path.basename(os.path.abspath(path))
    folder = os.path.dirname(os.path.abspath(path))
    _check(path, names, force)
    mark = f".{base[:100]}.{os.getpid()}-{os.urandom(4).hex()}"
    fresh, old = (os.path.join(folder, f"{mark}.{end}") for end in ("part", "old"))
    try:
        os.mkdir(fresh)
        for name, chunks in files:
            with replacing(os.path.join(fresh, name), False) as (stream, _):
                for chunk in chunks:
                    stream.write(chunk)
        _check(path, names, force)
        if os.path.lexists(path):
            os.rename(path, old)
        try:
            os.rename(fresh, path)
        except BaseException:
            if os.path.lexists(old):
                os.rename(old, path)
            raise
    except FileNotFoundError:
        raise InputError("there is no such directory", folder, "make it first") from None
    except OSError as error:
        raise InputError(f"the directory cannot be written: {error.strerror or error}", path) from None
    finally:
        for left in (fresh, old):
            with suppress(FileNotFoundError):
                shutil.rmtree(left)


def _check(path: str, names: Collection[str], force: bool) -> None:
    """Refuse a path that is taken: a directory of ours gives way by force, anything else does not."""
    if not os.path.lexists(path):
        return
    if not force:
        raise InputError(
            "this exists already", path, "give another name, or replace the directory: --force, force=True"
        )
    if os.path.islink(path) or not os.path.isdir(path):
        raise InputError("this is no directory, and a directory is to be written", path, "give another name")
    other = sorted(set(os.listdir(path)) - set(names))
    if other:
        raise InputError(
            f"the directory holds something else: {other[0]}", path, "give another name, or empty it first"
        )


def read_folder(path: str, names: Collection[str]) -> dict[str, bytes]:
    """The files of these names in a directory, by name.

    Raises
    ------
    InputError
    """
    if not os.path.isdir(path):
        raise InputError("there is no such directory")
    files = {}
    for name in sorted(set(names) & set(os.listdir(path))):
        try:
            with open(os.path.join(path, name), "rb") as stream:
                files[name] = stream.read()
        except OSError as error:
            raise InputError(f"it cannot be read: {error.strerror or error}", name) from None
    return files
