"""Files: triangulations and skeletons in, triangulations and skeletons out.

    read, load          a triangulation, a skeleton
    open_any            whichever it is, with its name, SHA-256 and how it was read
    write               either; atomic, and never over an existing file unless told to
    encode, decode      the same without files

Formats stand in one table (`registry`), a module each; a document (`document`) is what JSON, HDF5 and
NPZ have in common.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Mapping
from io import BytesIO
from typing import TYPE_CHECKING, Any, NamedTuple

from ..errors import DualizeError, InputError, LimitError
from ..skeleton import Skeleton
from ..triangulation import Triangulation

if TYPE_CHECKING:
    from os import PathLike
    from typing import BinaryIO

    from .registry import Format

__all__ = ["Opened", "decode", "encode", "formats", "load", "open_any", "read", "write"]


class Opened(NamedTuple):
    """What a file held.

    Attributes
    ----------
    content : Triangulation or Skeleton
    name : str
        Base name of the file, ``"-"`` for standard input.
    sha256 : str
        Of the raw bytes, in hexadecimal digits.
    kind : str
        Name of the format.
    how : str
        How it was read, in a few words.
    """

    content: Triangulation | Skeleton
    name: str
    sha256: str
    kind: str
    how: str

    def provenance(self) -> dict[str, str]:
        """What a skeleton made of this content says about its origin: no dates, no paths."""
        from .. import __version__

        return {
            "program": "dualize",
            "program_version": __version__,
            "input": self.name,
            "input_sha256": self.sha256,
            "read_as": self.how,
        }


def formats() -> Mapping[str, Format]:
    """All formats by name."""
    from .registry import formats

    return formats()


def read(
    path: str | PathLike[str] | BinaryIO,
    *,
    kind: str | None = None,
    dataset: str | None = None,
    threads: int | None = None,
) -> Triangulation:
    """Read a triangulation.

    Parameters
    ----------
    path : path, ``"-"`` (standard input) or binary stream
    kind : str, optional
        Name of the format (``text``, ``json``, ``hdf5``, ...) or a suffix; by default the suffix of the file
        decides, and the first bytes where there is none.
    dataset : str, optional
        Name of the array that holds the facets, where a file holds several.
    threads : int, optional

    Raises
    ------
    InputError
        If the file cannot be read, or holds a skeleton.
    TriangulationError
        If three or more simplices share a facet.
    """
    content, source = _open(path, kind, dataset, threads, None, hashed=False)[:2]
    if isinstance(content, Skeleton):
        raise InputError("this is a skeleton, not a triangulation", source.name, "use load")
    return content


def load(path: str | PathLike[str] | BinaryIO, *, kind: str | None = None, check: bool = True) -> Skeleton:
    """Load a skeleton, and validate it unless `check` is false.

    Raises
    ------
    InputError
        If the file cannot be read, or holds a triangulation.
    SkeletonError
        If it is damaged; the first wrong entry is named.
    """
    content, source = _open(path, kind, None, None, None, hashed=False)[:2]
    if isinstance(content, Triangulation):
        raise InputError(
            "this is a triangulation, not a skeleton", source.name, "read it, and build its skeleton"
        )
    if check:
        try:
            content.validate()
        except DualizeError as error:
            raise error.at(source.name) from None
    return content


def open_any(
    path: str | PathLike[str] | BinaryIO,
    *,
    kind: str | None = None,
    dataset: str | None = None,
    threads: int | None = None,
    notes: Callable[[str], object] | None = None,
    check: bool = True,
) -> Opened:
    """Read whatever a file holds.

    Parameters
    ----------
    path, kind, dataset, threads : see `read`
    notes : callable, optional
        Called with a line about what was left out, such as ``"ignored 12 triangle cells"``.
    check : bool
        Validate a skeleton.

    Raises
    ------
    InputError, SkeletonError, TriangulationError
    """
    content, source, chosen, how = _open(path, kind, dataset, threads, notes, hashed=True)
    if check and isinstance(content, Skeleton):
        try:
            content.validate()
        except DualizeError as error:
            raise error.at(source.name) from None
    base = source.name.replace("\\", "/").rsplit("/", 1)[-1]
    return Opened(content, base, source.sha256(), chosen.name, how)


def _open(
    path: Any,
    kind: str | None,
    dataset: str | None,
    threads: int | None,
    notes: Callable[[str], object] | None,
    hashed: bool,
) -> tuple[Triangulation | Skeleton, Any, Format, str]:
    from .source import open_source

    source = open_source(path)
    try:
        chosen, content, how = _read(source, kind, dataset, threads, notes, hashed)
    except DualizeError as error:
        raise error.at(source.name) from None
    except MemoryError:
        raise LimitError("there is not enough memory to read the file", source.name) from None
    except OSError as error:
        raise InputError(f"the file cannot be read: {error.strerror or error}", source.name) from None
    return content, source, chosen, how


def _read(
    source: Any,
    kind: str | None,
    dataset: str | None,
    threads: int | None,
    notes: Callable[[str], object] | None,
    hashed: bool,
) -> tuple[Format, Triangulation | Skeleton, str]:
    from .registry import Options, choose_reader

    chosen, suffix = choose_reader(source, kind, hashed)
    if dataset is not None and chosen.name not in ("hdf5", "npz"):
        raise InputError(f"{chosen.name} files have no named arrays", hint="leave the dataset out")
    if hashed:
        source.sha256()
    options = Options(dataset, threads, notes or (lambda line: None), suffix)
    assert chosen.read is not None
    content, how = chosen.read(source, options)
    return chosen, content, how


def decode(data: bytes, kind: str) -> Triangulation | Skeleton:
    """The content of bytes in a format; a skeleton is not validated beyond shapes and widths."""
    from .source import Source

    return _read(Source("-", data=data), kind, None, None, None, hashed=False)[1]


def encode(content: Triangulation | Skeleton, kind: str, *, compress: bool = False) -> bytes:
    """The bytes of a content in a format; see `write`."""
    from .registry import choose_writer
    from .target import Target

    gluing = kind == "gluing"
    chosen, suffix = choose_writer("-", "json" if gluing else kind, content)
    stream = BytesIO()
    assert chosen.write is not None
    chosen.write(content, Target(stream, None, suffix, compress, gluing))
    return stream.getvalue()


def write(
    content: Triangulation | Skeleton,
    path: str | PathLike[str],
    *,
    force: bool = False,
    kind: str | None = None,
    compress: bool = False,
    notes: Callable[[str], object] | None = None,
) -> None:
    """Write a triangulation or a skeleton: the whole file, or nothing.

    Parameters
    ----------
    content : Triangulation or Skeleton
    path : path, or ``"-"`` for standard output
    force : bool
        Overwrite an existing file.
    kind : str, optional
        Name of the format or a suffix; by default the suffix of the file decides.  ``"gluing"`` means a
        gluing table in the format of the suffix, also where labels determine the triangulation.
    compress : bool
        Compress the arrays of an HDF5 or NPZ file.  JSON and text are packed where the name ends
        with ``.gz``.
    notes : callable, optional
        Called with a line about what the format cannot hold.

    Raises
    ------
    InputError
        If the file exists and `force` is false, it cannot be written, or the format cannot hold the content.
    """
    import os

    from .registry import choose_writer
    from .target import Target, replacing

    name = os.fsdecode(path)
    gluing = kind == "gluing"
    if gluing:
        plain = name.lower().removesuffix(".gz")
        kind = "json" if name == "-" else "gluing-csv" if plain.endswith(".csv") else None
        if isinstance(content, Skeleton):
            raise InputError("a skeleton is no gluing table", hint="leave the kind out")
    chosen, suffix = choose_writer(name, kind, content)
    packed = name.lower().endswith(".gz")
    if compress and chosen.name not in ("hdf5", "npz"):
        raise InputError(f"{chosen.name} files are not compressed inside", hint="let the name end with .gz")
    if packed and not chosen.packed:
        raise InputError(
            f"{chosen.name} files are not packed with gzip", hint="take .gz off the name, and compress"
        )
    if gluing and chosen.name not in ("json", "hdf5", "npz", "gluing-csv"):
        raise InputError(f"{chosen.name} files hold no gluing tables", hint="write .json, .h5, .npz or .csv")
    if notes is not None and (lost := chosen.drops(content)):
        notes(f"left out {', '.join(lost)}, which {chosen.name} files cannot hold")
    assert chosen.write is not None
    if name == "-":
        sys.stdout.flush()
        chosen.write(content, Target(sys.stdout.buffer, None, suffix, compress, gluing))
        sys.stdout.buffer.flush()
        return
    try:
        with replacing(name, force) as (stream, temporary):
            if packed:
                import gzip

                with gzip.GzipFile("", "wb", 6, stream, mtime=0) as unpacked:
                    chosen.write(content, Target(unpacked, None, suffix, compress, gluing))  # type: ignore[arg-type]
            else:
                chosen.write(content, Target(stream, temporary, suffix, compress, gluing))
    except InputError as error:
        raise error if error.where and name in error.where else error.at(name) from None
