"""Reading and writing against the bare libraries."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np

import dualize

from .core import lattice, whole
from .frame import Work, case


@case("read text and match, periodic 8^4", "numpy.loadtxt of the file", seconds=1.0)
def text(folder: Path) -> Work:
    path = folder / "lattice.txt"
    np.savetxt(path, lattice(8), fmt="%d")
    return Work(lambda: dualize.read(path), lambda: np.loadtxt(path, dtype=np.int64))


@case("lines to an array, 10^7 of them", "numpy.loadtxt", ratio=1.0, stretch=0.5, repeats=1, quick=False)
def many_lines(folder: Path) -> Work:
    from dualize.formats.text import parse

    path = folder / "lattice.txt"
    facets = lattice(26)[: 10**7]
    with open(path, "w") as out:
        for part in np.array_split(facets, 100):
            out.write("\n".join(" ".join(map(str, row)) for row in part.tolist()) + "\n")
    return Work(
        lambda: parse(path.read_bytes()),
        lambda: np.loadtxt(path, dtype=np.int64),
        memory=2 * facets.nbytes + path.stat().st_size,
    )


def _skeleton() -> dualize.Skeleton:
    return whole(lattice(8))


@case("write NPZ, 8^4", "numpy.savez of the arrays", ratio=2.0)
def npz_write(folder: Path) -> Work:
    s = _skeleton()
    arrays = dict(s.arrays)
    return Work(
        lambda: s.write(folder / "foam.npz", force=True), lambda: np.savez(folder / "bare.npz", **arrays)
    )


@case("load NPZ, 8^4, without validation", "numpy.load of the arrays", ratio=2.0)
def npz_read(folder: Path) -> Work:
    s = _skeleton()
    s.write(folder / "foam.npz")
    np.savez(folder / "bare.npz", **s.arrays)

    def bare() -> list:
        with np.load(folder / "bare.npz") as box:
            return [box[name] for name in box.files]

    return Work(lambda: dualize.load(folder / "foam.npz", check=False), bare)


@case("write HDF5, 8^4", "h5py datasets of the arrays", ratio=2.0)
def hdf5_write(folder: Path) -> Work:
    s = _skeleton()
    return Work(lambda: s.write(folder / "foam.h5", force=True), lambda: _bare_hdf5(s, folder))


@case("load HDF5, 8^4, without validation", "h5py datasets of the arrays", ratio=2.0)
def hdf5_read(folder: Path) -> Work:
    import h5py

    s = _skeleton()
    s.write(folder / "foam.h5")
    _bare_hdf5(s, folder)

    def bare() -> list:
        with h5py.File(folder / "bare.h5") as box:
            return [box[name][()] for name in s.arrays]

    return Work(lambda: dualize.load(folder / "foam.h5", check=False), bare)


def _bare_hdf5(s: dualize.Skeleton, folder: Path) -> None:
    import h5py

    with h5py.File(folder / "bare.h5", "w") as box:
        for name, array in s.arrays.items():
            box[name] = array


@case("write JSON, 8^4", "json.dump of a tenth of it, times ten", seconds=1.0)
def json_write(folder: Path) -> Work:
    s = _skeleton()
    return Work(lambda: s.write(folder / "foam.json", force=True), lambda: _tenth(s), share=0.1)


@case("load JSON, 8^4, without validation", "json.load of the same", seconds=5.0)
def json_read(folder: Path) -> Work:
    s = _skeleton()
    s.write(folder / "foam.json")
    return Work(
        lambda: dualize.load(folder / "foam.json", check=False),
        lambda: json.loads((folder / "foam.json").read_bytes()),
    )


def _tenth(s: dualize.Skeleton) -> str:
    return json.dumps({name: array[: len(array) // 10].tolist() for name, array in s.arrays.items()})
