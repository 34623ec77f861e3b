"""Published triangulations and their published values, as data for many tests.

`catalogue/<name>.txt` holds one list of facets each, its source in the comments at its head.
`catalogue/published.json` holds the values: entry by entry what `Entry` lists, with the source.
`catalogue/gluings_*.json` hold gluing tables of one and two simplices: see `small_gluings`.

Citations are from memory.  Every value was recomputed by scripts that share nothing with this package
(f-vectors and duals by counting, homology by Smith form, labellings by rank, homomorphisms by search); the
field `known` says of each list whether it is a published one, built by a published rule, or made for this
purpose.  Numbers that were quoted without a computation are not in these files.
"""

import json
from dataclasses import dataclass
from functools import cache
from pathlib import Path

FOLDER = Path(__file__).parent / "catalogue"


@dataclass(frozen=True)
class Entry:
    """The values of one triangulation: `f` counts its simplices, `vertices` and below cells of the dual."""

    name: str
    title: str
    source: str
    known: str  # how the list was obtained, and what was verified
    vertex_links: dict  # {"sphere": n, "ball": n, "neither sphere nor ball": n}
    f: list
    euler: int
    homology: list  # H_0 .. H_D over the integers, "Z^2+Z_2"
    orientable: bool
    automorphisms: int | None
    vertices: int
    edges_internal: int
    edges_external: int
    faces_internal: int
    faces_external: int
    nodes: int
    links: int
    face_lengths: dict  # {length: number} of the internal faces
    log2_flat_z2: int
    inner_euler: int  # V - E + F of the internal cells
    boundary: dict | None  # f, euler, homology, components, orientable
    dual_group: dict | None  # abelianisation, homomorphisms {"Z2": n, ...} of the dual two-complex
    edge_path_group: dict | None  # the same of the triangulation; differs where vertices are singular
    intersection_form: dict | None  # rank, determinant, signature, parity

    @property
    def dimension(self):
        return len(self.f) - 1

    @property
    def manifold(self):
        """Is every vertex link a sphere or a ball?"""
        return "neither sphere nor ball" not in self.vertex_links

    @property
    def facets(self):
        return [list(f) for f in _facets(self.name)]

    @property
    def path(self):
        return FOLDER / f"{self.name}.txt"


@cache
def _facets(name):
    lines = (FOLDER / f"{name}.txt").read_text().splitlines()
    return tuple(tuple(map(int, line.split())) for line in lines if line and not line.startswith("#"))


def _entry(name, values):
    lengths = {int(length): number for length, number in values["face_lengths"].items()}
    return Entry(name=name, **{**values, "face_lengths": lengths})


CATALOGUE = {
    name: _entry(name, values) for name, values in json.loads((FOLDER / "published.json").read_text()).items()
}
NAMES = sorted(CATALOGUE)


def small_gluings():
    """{name: rows} of gluing tables of very few simplices.

    Entry [i][j] = [k, perm] sends the facet of simplex i opposite corner j to simplex k, corner c to perm[c].

    `tetrahedra_1_*` (4) and `tetrahedra_2_*` (17, of which one is non-orientable): all closed 3-manifold
    gluings of one and two tetrahedra up to relabelling.  Enumerated exhaustively; the numbers agree with
    B. A. Burton, The Pachner graph and the simplification of 3-sphere triangulations, SoCG 2011, and the
    first homology groups with S. V. Matveev, Complexity theory of three-dimensional manifolds, Acta Appl.
    Math. 19 (1990) 101-130 (both from memory).

    `four_simplices_2_*` (8): all orientable closed gluings of two 4-simplices whose vertex links are
    3-spheres, up to relabelling; enumerated exhaustively (500529 candidates): six of Euler characteristic 2,
    two of 0.
    """
    tetrahedra = json.loads((FOLDER / "gluings_tetrahedra_1_2.json").read_text())
    four = json.loads((FOLDER / "gluings_two_4_simplices.json").read_text())
    named = {f"tetrahedra_{n}_{i}": rows for n in ("1", "2") for i, rows in enumerate(tetrahedra[n])}
    return named | {f"four_simplices_2_{i}": rows for i, rows in enumerate(four)}


SMALL_GLUINGS = small_gluings()
# f-vectors of the eight gluings of two 4-simplices, as a multiset (same enumeration).
F_OF_TWO_FOUR_SIMPLICES = sorted(
    [(4, 7, 8, 5, 2)] * 2 + [(3, 4, 6, 5, 2)] * 3 + [(5, 10, 10, 5, 2)] + [(1, 4, 6, 5, 2)] * 2
)
