"""NPY: one array, the labels of the facets, integers or words.  Pickled objects are never read."""

from __future__ import annotations

from io import BytesIO
from typing import IO, Any

import numpy as np

from ..errors import InputError
from ..skeleton import Skeleton
from .document import content_of, document_of
from .registry import Content, Format, Options, dropping
from .source import Source
from .target import Target

__all__ = ["FORMAT", "npy_bytes", "read_array"]

MAGIC = b"\x93NUMPY"


def sniff(head: bytes) -> bool:
    """The magic string."""
    return head.startswith(MAGIC)


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a NPY file."""
    if isinstance(source.file, str):
        with open(source.file, "rb") as file:
            array = read_array(file, source.size, "the array")
    else:
        array = read_array(source.file, source.size, "the array")
    content, how = content_of({"facets": array}, options.threads, options.notes)
    return content, f"NPY, {how}"


def read_array(file: IO[bytes], size: int, name: str) -> np.ndarray:
    """The array in the NPY bytes of a file, which number `size`.

    Raises
    ------
    InputError
        If the header is damaged, asks for pickled objects, or for another number of bytes than there are.
    """
    try:
        version = np.lib.format.read_magic(file)
        if version == (1, 0):
            shape, fortran, dtype = np.lib.format.read_array_header_1_0(file)
        else:
            shape, fortran, dtype = np.lib.format.read_array_header_2_0(file)
        begin = file.tell()
    except (ValueError, EOFError, SyntaxError, KeyError, TypeError, OverflowError, RecursionError):
        raise InputError("the header is damaged", name, "is the file whole?") from None
    if dtype.hasobject:
        raise InputError("it holds pickled objects, which are never read", name, "save integers")
    if dtype.kind not in "biufcUS":
        raise InputError(f"entries of {dtype} are not read", name)
    if len(shape) > 32 or any(n < 0 for n in shape):
        raise InputError(f"the shape {shape} is impossible", name)
    count = 1
    for n in shape:
        count *= n
    there = size - begin
    wanted = count * dtype.itemsize
    if wanted != there:
        raise InputError(
            f"the header promises {wanted} bytes ({dtype}, shape {shape}), and there are {there}",
            name,
            "is the file whole?",
        )
    array = np.empty(count, dtype=dtype)
    if array.nbytes:
        room = array.view(np.uint8).data
        got = 0
        while got < len(room):
            n = file.readinto(room[got : got + (1 << 24)])  # type: ignore[attr-defined]
            if not n:
                raise InputError("the data end in the middle", name, "is the file whole?")
            got += n
    return array.reshape(shape, order="F" if fortran else "C")


def npy_bytes(array: np.ndarray) -> bytes:
    """The NPY bytes of an array."""
    stream = BytesIO()
    np.lib.format.write_array(stream, array, (1, 0), allow_pickle=False)
    return stream.getvalue()


def write(content: Content, target: Target) -> None:
    """Write the facets as a NPY file."""
    if isinstance(content, Skeleton):
        raise InputError("NPY holds one array, not a skeleton", hint="write .npz, .h5 or .json")
    document: dict[str, Any] = document_of(content)
    if "facets" not in document or content.corner_names is not None:
        raise InputError("NPY holds integer labels only", hint="write .npz, .h5 or .json")
    np.lib.format.write_array(
        target.stream, np.ascontiguousarray(document["facets"]), (1, 0), allow_pickle=False
    )


FORMAT = Format(
    name="npy",
    suffixes=(".npy",),
    holds="the facets of a triangulation",
    sniff=sniff,
    read=read,
    write=write,
    drops=dropping("the coordinates"),
)
