"""Where bytes come from: a file, standard input or a stream, or memory; all refusals in one place."""

from __future__ import annotations

import os
import stat
import sys
import zlib
from io import BytesIO
from typing import IO, Any

from ..errors import InputError

__all__ = ["Source", "check_unpacked", "open_source"]

HEAD = 4096  # bytes by which a format is recognised
GZIP = b"\x1f\x8b"

# What a compressed file may unpack to: so many bytes whatever its size, or so many times its own size.
UNPACKED_FLOOR = 256 << 20
UNPACKED_RATIO = 400  # HDF5 files of very regular complexes were seen to reach 155


class Source:
    """The bytes of one input.

    A format takes what suits it: `data`, all bytes at once, or `file`, a path or a binary stream.

    Attributes
    ----------
    name : str
        The path as it was given, ``"-"`` for standard input.
    path : str or None
        Set where the bytes lie in an ordinary file and are not compressed as a whole.
    """

    def __init__(self, name: str, *, path: str | None = None, data: bytes | None = None) -> None:
        self.name = name
        self.path = path
        self.unpacked = False
        self._data = data
        self._sha256: str | None = None

    @property
    def data(self) -> bytes:
        """All bytes."""
        if self._data is None:
            assert self.path is not None
            with open(self.path, "rb") as file:
                self._data = file.read()
        return self._data

    def take(self) -> bytes:
        """All bytes, which this object forgets: a reader that needs the room can let go of them."""
        data, self._data = self.data, None if self.path is not None else b""
        return data

    @property
    def head(self) -> bytes:
        """The first bytes."""
        if self._data is not None:
            return self._data[:HEAD]
        assert self.path is not None
        with open(self.path, "rb") as file:
            return file.read(HEAD)

    @property
    def size(self) -> int:
        """Number of bytes."""
        if self._data is not None:
            return len(self._data)
        assert self.path is not None
        return os.stat(self.path).st_size

    @property
    def file(self) -> str | BytesIO:
        """A path where there is one, else a binary stream."""
        return self.path if self.path is not None else BytesIO(self.data)

    def sha256(self) -> str:
        """SHA-256 of the raw bytes (before unpacking) in hexadecimal digits."""
        import hashlib

        if self._sha256 is None:
            if self._data is not None:
                self._sha256 = hashlib.sha256(self._data).hexdigest()
            else:
                assert self.path is not None
                with open(self.path, "rb") as file:
                    self._sha256 = hashlib.file_digest(file, "sha256").hexdigest()
        return self._sha256

    def unpack(self, hashed: bool) -> None:
        """Replace gzip bytes by what they hold, after hashing the raw bytes where that is asked for."""
        packed = self.data
        if hashed:
            self.sha256()
        self._data = _gunzip(packed)
        self.path = None
        self.unpacked = True


def open_source(path: Any) -> Source:
    """The source behind a path, ``"-"`` or a binary stream.

    Raises
    ------
    InputError
        If there is no such file, it is a directory, or it may not be read.
    """
    if hasattr(path, "read"):
        return _read_stream(path, "-")
    name = os.fsdecode(path)
    if name == "-":
        return _read_stream(sys.stdin.buffer, "-")
    try:
        mode = os.stat(name).st_mode
        if stat.S_ISDIR(mode):
            raise InputError("this is a directory, not a file", name, "name a file in it")
        if not stat.S_ISREG(mode):
            with open(name, "rb") as stream:
                return _read_stream(stream, name)
        with open(name, "rb"):
            pass
    except OSError as error:
        raise _unreadable(name, error) from None
    except ValueError:  # a NUL in the name
        raise InputError("there is no such file", repr(name)) from None
    return Source(name, path=name)


def _read_stream(stream: IO[bytes], name: str) -> Source:
    try:
        data = stream.read()
    except OSError as error:
        raise _unreadable(name, error) from None
    if not isinstance(data, bytes):
        raise InputError("the stream gives text, not bytes", name, "open it in binary mode: open(path, 'rb')")
    return Source(name, data=data)


def _unreadable(name: str, error: OSError) -> InputError:
    if isinstance(error, FileNotFoundError):
        from difflib import get_close_matches

        folder, base = os.path.split(name)
        try:
            near = get_close_matches(base, os.listdir(folder or "."), 1, 0.75)
        except OSError:
            near = []
        hint = f"is it {os.path.join(folder, near[0])}?" if near else "check the spelling and the directory"
        return InputError("there is no such file", name, hint)
    if isinstance(error, PermissionError):
        return InputError("the file may not be read", name, "change its permissions, or copy it")
    return InputError(f"the file cannot be read: {error.strerror or error}", name)


def _gunzip(packed: bytes) -> bytes:
    """Unpack all members of a gzip file; stops at once where it unpacks beyond reason."""
    out: list[bytes] = []
    total = 0
    rest = packed
    while rest.strip(b"\0"):
        member = zlib.decompressobj(wbits=31)
        while not member.eof:
            try:
                piece = member.decompress(rest, 1 << 24)
            except zlib.error as error:
                raise InputError(f"the gzip data are damaged: {error}", hint="copy the file again") from None
            rest = member.unconsumed_tail
            if not piece and not rest and not member.eof:
                raise InputError("the gzip data end in the middle", hint="copy the file again")
            out.append(piece)
            total += len(piece)
            check_unpacked(total, len(packed))
        rest = member.unused_data
    return b"".join(out)


def check_unpacked(unpacked: int, packed: int) -> None:
    """Refuse a file that unpacks to far more than its own size.

    Raises
    ------
    InputError
    """
    if unpacked > max(UNPACKED_FLOOR, UNPACKED_RATIO * packed):
        raise InputError(
            f"{packed} bytes unpack to {unpacked} or more, over {UNPACKED_RATIO} times the file's size",
            hint="if that is meant, unpack it and give the unpacked file",
        )
