"""NPZ: a zip file of NPY arrays under the names of the layout.

What is no array of numbers (``format``, ``counts``, ``flags``, ``provenance``, ``corner_names``, and any JSON
value of a further group) is a single string, an array without dimensions.  ``format`` is that string itself,
all others are JSON text; ``version`` and ``dimension`` are single integers.  There are no pickles.

    >>> import numpy, json                                               # doctest: +SKIP
    >>> z = numpy.load("foam.npz"); z["edges/face"]; json.loads(str(z["counts"]))   # doctest: +SKIP

The same content gives the same bytes: members have a fixed date.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from ..errors import InputError
from .containers import choose, further, unpack_strings
from .document import content_of, document_of
from .npy import npy_bytes, read_array
from .registry import Content, Format, Options
from .source import Source, check_unpacked
from .target import Target

if TYPE_CHECKING:
    import zipfile

__all__ = ["FORMAT"]

LONGEST_AGO = (1980, 1, 1, 0, 0, 0)
LEVEL = 1  # an eighth of the time of the usual 6, and no more bytes


def sniff(head: bytes) -> bool:
    """A zip file."""
    return head.startswith((b"PK\x03\x04", b"PK\x05\x06"))


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a NPZ file."""
    import zipfile
    import zlib

    try:
        with zipfile.ZipFile(source.file) as archive:
            members = _members(archive, source.size)
            names = choose(list(members), options.dataset, lambda name: _shape(archive, members[name], name))
            document = {}
            for name in names:
                info = members[name]
                with archive.open(info) as file:
                    document[names[name]] = read_array(file, info.file_size, name)
    except (zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, RuntimeError) as error:
        what = str(error) or type(error).__name__
        raise InputError(f"the zip file is damaged: {what}", hint="is the file whole?") from None
    content, how = content_of(unpack_strings(document), options.threads, options.notes)
    return content, f"NPZ, {how}"


def _members(archive: zipfile.ZipFile, size: int) -> dict[str, zipfile.ZipInfo]:
    members: dict[str, zipfile.ZipInfo] = {}
    for info in archive.infolist():
        name = info.filename.removesuffix(".npy")
        if name in members:
            raise InputError("two arrays have the same name", name)
        if info.filename != name:
            members[name] = info
    check_unpacked(sum(info.file_size for info in members.values()), size)
    return members


def _shape(archive: zipfile.ZipFile, info: zipfile.ZipInfo, name: str) -> tuple[tuple[int, ...], str]:
    with archive.open(info) as file:
        array = read_array(file, info.file_size, name)
        return array.shape, array.dtype.kind


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write a NPZ file."""
    import zipfile

    method = zipfile.ZIP_DEFLATED if target.compress else zipfile.ZIP_STORED
    document = document_of(content, target.gluing)
    with zipfile.ZipFile(target.stream, "w", method, allowZip64=True) as archive:
        for name, value in document.items():
            info = zipfile.ZipInfo(name + ".npy", LONGEST_AGO)
            info.compress_type = method
            info.external_attr = 0o644 << 16
            info.create_system = 3
            array = _array(name, value)
            array = np.ascontiguousarray(array) if array.ndim else array
            if target.compress:
                archive.writestr(info, npy_bytes(array), compresslevel=LEVEL)
            else:
                with archive.open(info, "w", force_zip64=True) as file:
                    np.lib.format.write_array(file, array, (1, 0), allow_pickle=False)


def _array(name: str, value: Any) -> np.ndarray:
    if isinstance(value, np.ndarray):
        return value
    if name in ("version", "dimension"):
        return np.array(value, dtype=np.int64)
    return np.array(value if name == "format" else further(name, value))


FORMAT = Format(
    name="npz",
    suffixes=(".npz",),
    holds="a triangulation or a skeleton",
    sniff=sniff,
    read=read,
    write=write,
)
