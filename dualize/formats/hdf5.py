"""HDF5: datasets under the names of the layout, groups by ``/``.

``format`` (a string), ``version`` and ``dimension`` (integers) are attributes of the root.  ``counts``,
``flags``, ``provenance`` and any JSON value of a further group are datasets of a single string, JSON text (as
attributes they would be limited to 64 kB); ``corner_names`` is a dataset of strings.  Triangulations lie
there likewise: ``facets``, or ``across`` and ``carry``, and so on.

The same content gives the same bytes: no times are kept.
"""

from __future__ import annotations

from collections.abc import Callable
from io import BytesIO, RawIOBase
from typing import IO, TYPE_CHECKING, Any

import numpy as np

from ..errors import InputError
from .containers import choose, further, unpack_strings
from .document import content_of, document_of
from .registry import Content, Format, Options
from .source import Source, check_unpacked
from .target import Target

if TYPE_CHECKING:
    import h5py

__all__ = ["FORMAT"]

ATTRIBUTES = ("format", "version", "dimension")
DEEPEST = 64
CHUNK = 1 << 17  # entries, where tables are compressed


def sniff(head: bytes) -> bool:
    """The signature of HDF5, at the start of the file or behind a user block."""
    return any(head[at : at + 8] == b"\x89HDF\r\n\x1a\n" for at in (0, 512, 1024, 2048))


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read an HDF5 file."""
    import h5py

    try:
        with h5py.File(source.file, "r") as file:
            datasets = _datasets(file)
            check_unpacked(sum((d.size or 0) * d.dtype.itemsize for d in datasets.values()), source.size)
            known = list(datasets) + [name for name in ATTRIBUTES if name in file.attrs]
            names = choose(known, options.dataset, lambda name: _outline(datasets[name]))
            document: dict[str, Any] = {}
            for name in names:
                document[names[name]] = (
                    _array(datasets[name], name) if name in datasets else _attribute(file, name)
                )
    except InputError:
        raise
    # the library raises one or the other, and not always the same for the same damage
    except (OSError, RuntimeError, KeyError, ValueError, TypeError, OverflowError, UnicodeError) as error:
        what = (str(error) or type(error).__name__).splitlines()[0][:160]
        raise InputError(f"the HDF5 file cannot be read: {what}", hint="is the file whole?") from None
    content, how = content_of(unpack_strings(document), options.threads, options.notes)
    return content, f"HDF5, {how}"


def _datasets(file: h5py.File) -> dict[str, h5py.Dataset]:
    """All datasets of the file itself; links to elsewhere are refused, and circles end."""
    import h5py

    found: dict[str, h5py.Dataset] = {}
    seen: set[Any] = set()
    stack: list[tuple[str, h5py.Group]] = [("", file)]
    while stack:
        prefix, group = stack.pop()
        mark = h5py.h5o.get_info(group.id).addr
        if mark in seen or prefix.count("/") > DEEPEST:
            continue
        seen.add(mark)
        for key in group:
            name = f"{prefix}{key}"
            if not isinstance(group.get(key, getlink=True), h5py.HardLink):
                raise InputError(
                    "a link to another place is not followed", name, "copy the data into the file"
                )
            item = group[key]
            if isinstance(item, h5py.Group):
                stack.append((name + "/", item))
            elif isinstance(item, h5py.Dataset):
                if item.is_virtual or item.external:
                    raise InputError("data in another file are not read", name, "copy the data into the file")
                found[name] = item
    return dict(sorted(found.items()))


def _outline(dataset: h5py.Dataset) -> tuple[tuple[int, ...], str]:
    """Shape and kind of entries, strings as ``"U"``."""
    import h5py

    text = h5py.check_string_dtype(dataset.dtype) is not None
    return dataset.shape or (), "U" if text else dataset.dtype.kind


def _array(dataset: h5py.Dataset, name: str) -> np.ndarray:
    import h5py

    kind = h5py.check_string_dtype(dataset.dtype)
    if dataset.shape is None:
        raise InputError("the dataset is empty", name)
    if kind is not None:
        texts = dataset.asstr()[()]
        return np.array(texts, dtype=str) if dataset.shape == () else np.array(texts.tolist(), dtype=str)
    if dataset.dtype.kind not in "biufc":
        raise InputError(f"entries of {dataset.dtype} are not read", name)
    array = np.empty(dataset.shape, dtype=dataset.dtype)
    if array.size:
        dataset.read_direct(array)
    return array


def _attribute(file: h5py.File, name: str) -> np.ndarray:
    value = file.attrs[name]
    return np.array(value.decode("utf-8") if isinstance(value, bytes) else value)


# -- writing ---------------------------------------------------------------------------------------


class _Patient(RawIOBase):
    """A stream for the HDF5 library in which nothing fails.

    The library cannot take back a failed write: closing the file fails again, loudly and in odd places.  So
    the first failure (a full disk, an interrupt) is kept here for `settle`, and what is written after it is
    dropped.
    """

    def __init__(self, stream: IO[bytes]) -> None:
        self.stream = stream
        self.failure: BaseException | None = None

    def _try(self, function: Callable[..., int], *arguments: Any) -> int:
        try:
            return function(*arguments)
        except BaseException as failure:
            self.failure = self.failure or failure
            return 0

    def write(self, data: Any) -> int:
        if self.failure is None:
            self._try(self.stream.write, data)
        return len(data)

    def seek(self, offset: int, whence: int = 0) -> int:
        return self._try(self.stream.seek, offset, whence)

    def tell(self) -> int:
        return self._try(self.stream.tell)

    def readinto(self, room: Any) -> int:
        self._try(self.stream.readinto, room)  # type: ignore[attr-defined]
        return len(room)

    def truncate(self, size: int | None = None) -> int:
        return self._try(self.stream.truncate, size)

    def close(self) -> None:
        """The stream belongs to someone else."""

    def settle(self) -> None:
        """Raise what failed."""
        if self.failure is not None:
            raise self.failure


def write(content: Content, target: Target) -> None:
    """Write an HDF5 file."""
    import h5py

    document = document_of(content, target.gluing)
    stream = target.stream if target.path is not None else BytesIO()
    patient = _Patient(stream)
    try:
        with h5py.File(patient, "w") as file:
            _fill(file, document, target.compress)
    except (OSError, RuntimeError):
        patient.settle()
        raise
    patient.settle()
    if isinstance(stream, BytesIO):
        target.stream.write(stream.getbuffer())


def _fill(file: h5py.File, document: dict[str, Any], compress: bool) -> None:
    import h5py

    text = h5py.string_dtype("utf-8")
    for name, value in document.items():
        if name in ATTRIBUTES:
            file.attrs.create(name, value, dtype=text if isinstance(value, str) else np.int64)
        elif isinstance(value, np.ndarray):
            options: dict[str, Any] = {}
            if compress and value.size > 64:
                rows = max(1, min(len(value), CHUNK * len(value) // value.size))
                options = {"compression": "gzip", "shuffle": True, "chunks": (rows, *value.shape[1:])}
            file.create_dataset(name, data=value, track_times=False, **options)
        elif name == "corner_names":
            words = np.array(value, dtype=object)
            file.create_dataset(name, data=words, dtype=text, track_times=False)
        else:
            json = further(name, value).encode()
            inline = h5py.string_dtype("utf-8", max(1, len(json)))
            file.create_dataset(name, data=np.array(json, dtype=inline), track_times=False)


FORMAT = Format(
    name="hdf5",
    suffixes=(".h5", ".hdf5", ".hdf"),
    holds="a triangulation or a skeleton",
    sniff=sniff,
    read=read,
    write=write,
)
