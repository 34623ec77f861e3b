"""Bubbles: the closed surfaces of the foam that bound its dual 3-cells.

A point of a 3D triangulation, or a segment of a 4D one, that does not lie in the boundary is dual to a
3-cell; the faces of the foam around it close to a surface, its *bubble*, which is the dual of its link.  A
gluing table may identify what lies around it: a bubble then passes several times through one face.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..layout import wedge_pairs
from ..skeleton import Skeleton
from ..topology.classes import classes, corner_subsets
from ..topology.gluing import gluing_of

__all__ = ["Bubbles", "bubbles"]


@dataclass(frozen=True, eq=False)
class Bubbles:
    """The bubbles of a foam, in the order of the first occurrence of their simplices.

    Attributes
    ----------
    simplex : ndarray of int64, shape (n, 1 + D - 2)
        A vertex of the foam and the corners there that span the point or segment.
    characteristic : ndarray of int64, shape (n,)
        Euler characteristic of the surface: 2 for a sphere.
    face_offsets, face, face_times : ndarray of int64
        Faces of each bubble, ascending, and how often the surface passes through each.
    edge_offsets, edge, edge_times, vertex_offsets, vertex, vertex_times : ndarray of int64
        Likewise.
    irregular : ndarray of bool, shape (n,)
        Where the point or segment is glued to itself other than by the identity; the surface is then that
        around one side of it.
    """

    simplex: np.ndarray
    characteristic: np.ndarray
    face_offsets: np.ndarray
    face: np.ndarray
    face_times: np.ndarray
    edge_offsets: np.ndarray
    edge: np.ndarray
    edge_times: np.ndarray
    vertex_offsets: np.ndarray
    vertex: np.ndarray
    vertex_times: np.ndarray
    irregular: np.ndarray

    def __len__(self) -> int:
        return len(self.characteristic)

    def __repr__(self) -> str:
        return f"<Bubbles: {len(self)}, {self.independent} independent mod 2>"

    def faces_of(self, bubble: int) -> list[int]:
        """The faces of one bubble."""
        a, b = self.face_offsets[bubble : bubble + 2]
        return [int(f) for f in self.face[a:b]]

    def relations(self) -> list[list[int]]:
        """A basis of the relations mod 2: sets of bubbles that pass every face an even number of times."""
        pivots: dict[int, tuple[int, int]] = {}
        out = []
        for n in range(len(self)):
            a, b = self.face_offsets[n : n + 2]
            row = 0
            for f, m in zip(self.face[a:b].tolist(), self.face_times[a:b].tolist(), strict=True):
                row ^= (m & 1) << f
            mix = 1 << n
            while row:
                lead = row.bit_length() - 1
                if lead not in pivots:
                    pivots[lead] = row, mix
                    break
                row ^= pivots[lead][0]
                mix ^= pivots[lead][1]
            if not row:
                out.append([x for x in range(n + 1) if mix >> x & 1])
        return out

    @property
    def independent(self) -> int:
        """How many bubbles are independent mod 2."""
        return len(self) - len(self.relations())

    def to_dict(self) -> dict[str, Any]:
        """Everything as plain lists."""
        rows = []
        for n in range(len(self)):
            row: dict[str, Any] = {"characteristic": int(self.characteristic[n])}
            for kind in ("face", "edge", "vertex"):
                offsets = getattr(self, f"{kind}_offsets")
                a, b = int(offsets[n]), int(offsets[n + 1])
                plural = "vertices" if kind == "vertex" else f"{kind}s"
                row[plural] = getattr(self, kind)[a:b].tolist()
                times = getattr(self, f"{kind}_times")[a:b]
                if (times != 1).any():
                    row[f"{kind}_times"] = times.tolist()
            row["vertex"], row["corners"] = int(self.simplex[n, 0]), self.simplex[n, 1:].tolist()
            if self.irregular[n]:
                row["irregular"] = True
            rows.append(row)
        return {"bubbles": rows, "independent": self.independent, "relations": self.relations()}


def bubbles(skeleton: Skeleton, *, threads: int | None = None) -> Bubbles:
    """The bubbles of a 3D or 4D foam.

    Parameters
    ----------
    skeleton : Skeleton
    threads : int, optional

    Raises
    ------
    InputError
        If the dimension is 2, where there are no 3-cells.

    Examples
    --------
    Five 4-simplices around a point have five bubbles, one for each inner segment, and one relation:

    >>> from dualize import build, make
    >>> bubbles(build(make.move_side(4, 5)))
    <Bubbles: 5, 4 independent mod 2>
    """
    d = skeleton.dimension
    if d < 3:
        raise InputError("a 2D foam has no bubbles")
    t = gluing_of(skeleton, threads=threads)
    found = classes(t, d - 2, threads=threads)
    subsets = corner_subsets(d, d - 2)
    inside = np.zeros((len(subsets), d + 1), dtype=bool)
    np.put_along_axis(inside, subsets, True, axis=1)
    number = found.number.astype(np.int64)  # (V, subsets)
    # the slots around a subset are those opposite the other corners
    simplex, subset, slot = np.nonzero(~inside[None, :, :] & np.ones((len(t), 1, 1), dtype=bool))
    cell = number[simplex, subset]
    edge = skeleton["vertices/edge"][simplex, slot].astype(np.int64)
    interior = np.ones(found.count, dtype=bool)
    interior[cell[t.across[simplex, slot] < 0]] = False
    new = np.cumsum(interior) - 1
    count = int(interior.sum())

    def listed(cells: np.ndarray, members: np.ndarray, share: int) -> tuple[np.ndarray, ...]:
        """Members of each interior cell and how often each is there, from `share` mentions for each time."""
        keep = interior[cells]
        code, times = np.unique(new[cells[keep]] * (1 << 32) + members[keep], return_counts=True)
        owner, member = code >> 32, code & ((1 << 32) - 1)
        offsets = np.concatenate([[0], np.cumsum(np.bincount(owner, minlength=count))])
        return offsets.astype(np.int64), member, times // share, owner

    v_off, vertex, v_times, v_owner = listed(number.ravel(), np.repeat(np.arange(len(t)), len(subsets)), 1)
    e_off, edges, e_times, e_owner = listed(cell, edge, 2)
    # the subsets of the ridge at the first wedge of each internal face
    pairs = np.array(wedge_pairs(d))
    inner = skeleton.counts["faces_internal"]
    first = skeleton["faces/vertex_offsets"][:inner]
    at, wedge = skeleton["faces/vertex"][first].astype(np.int64), skeleton["faces/wedge"][first]
    # (subsets, W): whether the subset lies in the ridge
    clear: np.ndarray = ~np.any(inside[:, pairs], axis=2)
    parts = np.array([np.flatnonzero(clear[:, w]) for w in range(len(pairs))])
    of_face = number[at[:, None], parts[wedge]]  # (F_int, D - 1)
    f_off, faces, f_times, f_owner = listed(of_face.ravel(), np.repeat(np.arange(inner), of_face.shape[1]), 1)
    sums = [np.bincount(o, weights=n, minlength=count) for o, n in
            ((v_owner, v_times), (e_owner, e_times), (f_owner, f_times))]  # fmt: skip
    where = found.first[interior]
    home = np.column_stack([where // len(subsets), subsets[where % len(subsets)]])
    return Bubbles(
        simplex=home.astype(np.int64),
        characteristic=(sums[0] - sums[1] + sums[2]).astype(np.int64),
        face_offsets=f_off,
        face=faces,
        face_times=f_times,
        edge_offsets=e_off,
        edge=edges,
        edge_times=e_times,
        vertex_offsets=v_off,
        vertex=vertex,
        vertex_times=v_times,
        irregular=found.irregular[interior],
    )
