"""From labels to skeletons: speed against a sort of as many keys and against gudhi, scale, bad cases."""

from __future__ import annotations

import itertools
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np

import dualize
from dualize import kernels

from .frame import Work, case, result_bytes


def lattice(n: int, dimension: int = 4) -> np.ndarray:
    """Top simplices of the periodic grid of n**D cubes, each in D! path simplices (Freudenthal 1942), grouped
    by permutation."""
    cubes = np.indices((n,) * dimension).reshape(dimension, -1).T
    weights = n ** np.arange(dimension)
    rows = []
    for order in itertools.permutations(range(dimension)):
        steps = np.zeros((dimension + 1, dimension), dtype=np.int64)
        for k, axis in enumerate(order):
            steps[k + 1 :, axis] += 1
        rows.append(np.stack([((cubes + step) % n) @ weights for step in steps], axis=1))
    return np.concatenate(rows)


def whole(facets: np.ndarray, threads: int | None = None) -> dualize.Skeleton:
    """Labels in memory to a complete skeleton."""
    return dualize.build(dualize.Triangulation.from_facets(facets, threads=threads), threads=threads)


def keys(count: int) -> np.ndarray:
    return np.random.default_rng(1).integers(0, 2**62, count)


def shuffled(facets: np.ndarray) -> np.ndarray:
    random = np.random.default_rng(2)
    return random.permutation(int(facets.max()) + 1)[random.permutation(facets)]


# -- one simplex -----------------------------------------------------------------------------------


@case("command line, one 4-simplex, cold", 'python -c "import numpy"', ratio=3.0, repeats=15)
def one_simplex(folder: Path) -> Work:
    mesh, foam = folder / "one.txt", folder / "one.json"
    mesh.write_text("0 1 2 3 4\n")
    program = str(Path(sys.executable).parent / "dualize")
    ours = [program, "build", "--quiet", str(mesh), "-o", str(foam), "--force"]
    plain = [sys.executable, "-c", "import numpy"]
    return Work(lambda: subprocess.run(ours, check=True), lambda: subprocess.run(plain, check=True))


SPHERE = list(itertools.combinations(range(6), 5))


@case("build 1,000 six-simplex spheres, kernels loaded", "numpy.sort of 100,000 keys", seconds=0.3)
def loaded(folder: Path) -> Work:
    t = dualize.Triangulation.from_facets(SPHERE)
    with kernels.mode("compiled"):
        dualize.build(t)
    return Work(lambda: [dualize.build(t) for _ in range(1000)], lambda: np.sort(keys(100_000)))


@case("build 100 six-simplex spheres, interpreted", "numpy.sort of 100,000 keys", seconds=0.2)
def interpreted(folder: Path) -> Work:
    t = dualize.Triangulation.from_facets(SPHERE)
    return Work(lambda: [dualize.build(t) for _ in range(100)], lambda: np.sort(keys(100_000)))


# -- the lattice -----------------------------------------------------------------------------------


@case("labels to skeleton, periodic 8^4", "numpy.sort of 10 N keys", ratio=4.0, seconds=1.5)
def lattice_8(folder: Path) -> Work:
    facets = lattice(8)
    return Work(lambda: whole(facets), lambda: np.sort(keys(10 * len(facets))))


@case("labels to skeleton, periodic 16^4", "numpy.sort of 10 N keys", ratio=4.0, stretch=3.0)
def lattice_16(folder: Path) -> Work:
    facets, numbers = lattice(16), keys(10 * 24 * 16**4)
    room = facets.nbytes + 2 * 378 * len(facets)
    return Work(lambda: whole(facets), lambda: np.sort(numbers), memory=room)


@case(
    "labels to skeleton, periodic 16^4 ",
    "gudhi insert_batch of the facets",
    ratio=1 / 3,
    stretch=1 / 6,
    quick=False,
)
def lattice_gudhi(folder: Path) -> Work:
    import gudhi

    facets = lattice(16)
    columns = np.ascontiguousarray(facets.T)

    def reference() -> object:
        tree = gudhi.SimplexTree()
        tree.insert_batch(columns, np.zeros(columns.shape[1]))
        return tree

    return Work(lambda: whole(facets), reference)


@case("16^4 shuffled, simplices and labels", "the same in order", ratio=4.0, stretch=2.5, quick=False)
def lattice_shuffled(folder: Path) -> Work:
    facets = lattice(16)
    mixed = shuffled(facets)
    return Work(lambda: whole(mixed), lambda: whole(facets))


@case("10.97 million 4-simplices, per simplex", "98,304 of them", ratio=1.6, repeats=2, quick=False)
def lattice_26(folder: Path) -> Work:
    large, small = lattice(26), lattice(8)
    return Work(
        lambda: whole(large),
        lambda: whole(small),
        share=len(small) / len(large),
        memory=6 * 2**30 - large.nbytes,
    )


@case("10.08 million tetrahedra", "as many 4-simplices", ratio=0.6, repeats=2, quick=False)
def lattice_3d(folder: Path) -> Work:
    flat, large = lattice(119, 3), lattice(26)
    return Work(lambda: whole(flat), lambda: whole(large), share=len(large) / len(flat))


@case("16^4, one thread", "two threads", quick=False)
def one_thread(folder: Path) -> Work:
    """The ratio is what the second thread gains; it should be at least 1.5."""
    facets = lattice(16)
    return Work(lambda: whole(facets, 1), lambda: whole(facets, 2))


# -- bad cases: at most twice the lattice, per byte of result -----------------------------------------


def _bad(facets: np.ndarray) -> Work:
    usual = lattice(14)
    share = result_bytes(whole(usual)) / result_bytes(whole(facets))
    return Work(lambda: whole(facets), lambda: whole(usual), share=share)


def _cone() -> np.ndarray:
    base = lattice(40, 3)
    return np.hstack([base, np.full((len(base), 1), base.max() + 1)])


@case("cone over 384,000 tetrahedra", "14^4 lattice, per byte", ratio=2.0)
def cone(folder: Path) -> Work:
    return _bad(_cone())


@case("suspension of 384,000 tetrahedra", "14^4 lattice, per byte", ratio=2.0, quick=False)
def suspension(folder: Path) -> Work:
    north = _cone()
    south = north.copy()
    south[:, -1] += 1
    return _bad(np.vstack([north, south]))


@case("a ridge with a million simplices around it", "14^4 lattice, per byte", ratio=2.0)
def ring(folder: Path) -> Work:
    n = 10**6
    around = np.arange(n)
    ridge = np.repeat([[0, 1, 2]], n, axis=0)
    return _bad(np.column_stack([ridge, 3 + around, 3 + (around + 1) % n]))


@case("a million separate 4-simplices", "14^4 lattice, per byte", ratio=2.0)
def separate(folder: Path) -> Work:
    return _bad(np.arange(5 * 10**6).reshape(-1, 5))


@case("separate 4-simplices, scattered labels", "14^4 lattice, per byte", ratio=2.0, quick=False)
def scattered(folder: Path) -> Work:
    return _bad(np.random.default_rng(3).permutation(5 * 10**6).reshape(-1, 5) * 2**40 - 2**61)


@case("14^4 with huge and negative labels", "14^4 lattice, per byte", ratio=2.0)
def huge(folder: Path) -> Work:
    facets = lattice(14)
    labels = np.random.default_rng(4).integers(-(2**62), 2**62, int(facets.max()) + 1)
    return _bad(labels[facets])


@case("14^4 with labels a power of two apart", "14^4 lattice, per byte", ratio=2.0, quick=False)
def aligned(folder: Path) -> Work:
    return _bad(lattice(14) << 40)


@case("words as labels, 8^4", "numpy.unique of the words, with inverse", ratio=1.5)
def words(folder: Path) -> Work:
    facets = lattice(8)
    names = np.array([f"site-{x:05d}" for x in range(int(facets.max()) + 1)])[facets]
    return Work(
        lambda: dualize.Triangulation.from_facets(names), lambda: np.unique(names, return_inverse=True)
    )


# -- validation ------------------------------------------------------------------------------------


@case("validate, periodic 16^4", "its build", ratio=1.0, quick=False)
def validate(folder: Path) -> Work:
    t = dualize.Triangulation.from_facets(lattice(16))
    s = dualize.build(t)
    return Work(s.validate, lambda: dualize.build(t))


@case("interrupted build gives back the prompt", "a second", quick=False, seconds=1.0)
def interrupted(folder: Path) -> Work:
    """Seconds from the signal to the end of the process, a build of 1.5 million simplices under way."""
    mesh = folder / "lattice.npy"
    np.save(mesh, lattice(16))
    program = str(Path(sys.executable).parent / "dualize")

    def ours() -> float:
        run = subprocess.Popen(
            [program, "build", str(mesh), "-o", str(folder / "foam.h5")], stderr=subprocess.DEVNULL
        )
        time.sleep(2.0)
        begin = time.perf_counter()
        run.send_signal(signal.SIGINT)
        run.wait()
        return time.perf_counter() - begin

    return Work(ours, lambda: 1.0)
