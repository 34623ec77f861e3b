"""The fundamental group read from a foam: generators are edges off a spanning tree, relators are faces."""

from __future__ import annotations

import numpy as np

from ..kernels import engine
from ..kernels.words import merge_generators, span_tree
from ..skeleton import Skeleton
from .presentation import Presentation, simplified

__all__ = ["foam_groups", "foam_presentation"]


def foam_presentation(skeleton: Skeleton, *, threads: int | None = None) -> list[Presentation]:
    """The presentation of each component as the foam gives it: internal edges off a tree, internal faces.

    Generators are numbered in the order of the edges, relators in that of the faces.

    Examples
    --------
    A Moebius band of five triangles, its foam one circle:

    >>> from dualize import Triangulation, build
    >>> rows = [[0, 1, 2], [1, 2, 3], [2, 3, 4], [0, 3, 4], [0, 1, 4]]
    >>> band = Triangulation.from_facets(rows)
    >>> print(foam_presentation(build(band))[0])
    <a | >
    """
    offsets, letters, parts_of_edge, parts_of_face, parts = _words(skeleton, threads)
    out = []
    number = np.zeros(len(parts_of_edge) + 1, dtype=np.int64)
    for part in range(parts):
        mine = np.flatnonzero(parts_of_edge == part)
        number[mine + 1] = np.arange(1, len(mine) + 1)
        faces = np.flatnonzero(parts_of_face == part).tolist()
        words = (letters[offsets[f] : offsets[f + 1]] for f in faces)
        relators = tuple(tuple((np.sign(w) * number[np.abs(w)]).tolist()) for w in words)
        out.append(Presentation(len(mine), relators))
    return out


def foam_groups(skeleton: Skeleton, *, threads: int | None = None) -> list[Presentation]:
    """A short presentation of the fundamental group of each component, base point its lowest vertex.

    Parameters
    ----------
    skeleton : Skeleton
    threads : int, optional

    Returns
    -------
    list of Presentation
        Where all links are spheres or balls, the fundamental group of the space; otherwise that of the space
        without its singular points, which may be larger.

    Notes
    -----
    The foam is the 2-skeleton of the dual cell complex (H. Seifert, W. Threlfall, Lehrbuch der Topologie,
    1934, sections 44-46; from memory).  Faces with one letter left, or two, are used first, in almost linear
    time; then `simplified`.

    Examples
    --------
    >>> from itertools import combinations
    >>> from dualize import Triangulation, build
    >>> sphere = Triangulation.from_facets(list(combinations(range(5), 4)))
    >>> [str(group) for group in foam_groups(build(sphere))]
    ['<trivial>']
    """
    offsets, letters, parts_of_edge, parts_of_face, parts = _words(skeleton, threads)
    generators, relators = len(parts_of_edge), len(parts_of_face)
    ids = np.int64
    length = np.diff(offsets)
    parent = np.arange(generators + 1, dtype=ids)
    head = np.full(generators + 1, -1, dtype=ids)
    end = np.full(generators + 1, -1, dtype=ids)
    follow = np.full(len(letters) + 1, -1, dtype=ids)
    owner = np.abs(letters)
    weight = np.bincount(owner, minlength=generators + 1).astype(ids)
    sort = np.argsort(owner, kind="stable")
    same = np.flatnonzero(owner[sort][1:] == owner[sort][:-1])
    follow[sort[same]] = sort[same + 1]
    head[owner[sort][::-1]] = sort[::-1]
    end[owner[sort]] = sort
    relator = np.repeat(np.arange(relators, dtype=ids), length)
    stack = np.arange(relators - 1, -1, -1, dtype=ids)
    inside = np.ones(relators, dtype=np.int8)
    run = engine(len(skeleton["vertices/orientation"]), threads)
    lists = (parent, weight, head, end, follow, relator, stack, inside)
    run(merge_generators, offsets, letters, length, *lists, relators)
    roots = np.flatnonzero(parent[1:] == np.arange(1, generators + 1))
    number = np.zeros(generators + 1, dtype=ids)
    left = np.flatnonzero(length)
    out = []
    for part in range(parts):
        mine = roots[parts_of_edge[roots] == part]
        number[mine + 1] = np.arange(1, len(mine) + 1)
        words = []
        for f in left[parts_of_face[left] == part].tolist():
            word = letters[offsets[f] : offsets[f] + length[f]]
            words.append((np.sign(word) * number[np.abs(word)]).tolist())
        out.append(simplified(len(mine), words))
    return out


def _words(s: Skeleton, threads: int | None) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray, int]:
    """The internal faces as words in the internal edges off a spanning tree, numbered from 1.

    Returns offsets and letters, the component of each generator and of each face, and their number.
    """
    n, k = s["vertices/edge"].shape
    interior, faces = int(s.counts["edges_internal"]), int(s.counts["faces_internal"])
    tree = np.zeros(interior + 1, dtype=np.int8)
    queue = np.zeros(2 * n, dtype=np.int64)
    source, target = s["edges/source"], s["edges/target"]
    parts = engine(n, threads)(
        span_tree,
        s["vertices/edge"].ravel(),
        source.ravel(),
        target.ravel(),
        tree,
        queue,
        tuple(range(k)),
        interior,
        n,
    )
    chosen = np.flatnonzero(tree[:interior] == 0)
    number = np.zeros(interior + 1, dtype=np.int64)
    number[chosen] = np.arange(1, len(chosen) + 1)
    visits = int(s["faces/edge_offsets"][faces])
    letters = number[s["faces/edge"][:visits]] * s["faces/edge_sign"][:visits]
    kept = letters != 0
    offsets = np.concatenate([[0], np.cumsum(kept)])[s["faces/edge_offsets"][: faces + 1]].astype(np.int64)
    component = s["vertices/component"]
    starts = s["faces/vertex"][s["faces/vertex_offsets"][:faces]]
    return offsets, letters[kept], component[source[chosen, 0]], component[starts], int(parts)
