"""Subdivisions: stellar, barycentric of complexes and of gluing tables, and edgewise refinement."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from ..errors import InputError
from ..kernels.permutations import permutations_of
from ..topology.classes import classes, corner_subsets
from ..topology.derived import first_derived
from ..triangulation import Coordinates, Triangulation
from .charts import averages, charts
from .common import (
    Changed,
    as_written,
    as_written_chart,
    check_room,
    fresh_labels,
    fresh_words,
    label_numbers,
    labelled,
    need_labels,
    new_label,
    new_labels_of,
    number,
    rows_with,
    show,
    with_fields,
)
from .tables import by_labels, labels_name_simplices, new_positions
from .templates import Template, barycentric, edgewise, glued_pieces

__all__ = ["derived", "refine", "stellar"]

# -- one new point ---------------------------------------------------------------------------------


def stellar(triangulation: Triangulation, at: Sequence[Any], *, label: int | str | None = None) -> Changed:
    """Subdivide a simplex of any dimension by a point inside it, and with it all simplices around it.

    Every top simplex that contains the simplex A is replaced by its |A| pieces with the new point in the
    place of one corner of A.  The simplex may lie in the boundary, which is then subdivided too.

    Parameters
    ----------
    triangulation : Triangulation
        A labelled complex.
    at : sequence of labels
        A; at least two labels.
    label : int or str, optional
        Of the new point; by default the number after the largest label, or ``new0``.

    Examples
    --------
    >>> t = Triangulation.from_facets([[0, 1, 2], [1, 2, 3]])
    >>> stellar(t, [1, 2]).triangulation.corners.tolist()
    [[0, 2, 4], [0, 1, 4], [2, 3, 4], [1, 3, 4]]
    """
    t = triangulation
    corners = need_labels(t, "a stellar subdivision")
    a = label_numbers(t, list(at))
    if len(a) < 2:
        raise InputError("a stellar subdivision needs at least two labels", show(t, a))
    star = rows_with(corners, a)
    if not len(star):
        raise InputError("these labels are no simplex of the complex", show(t, a))

    words = None if t.corner_names is None else list(t.corner_names)
    if words is not None:
        new = len(words)
        words.append(fresh_words(words, 1)[0] if label is None else str(new_label(t, label)))
        name: int | str = words[-1]
    else:
        new = int(fresh_labels(t, 1)[0]) if label is None else int(new_label(t, label))
        name = new
    rows = as_written(t)
    inside = np.zeros(len(t), dtype=bool)
    inside[star] = True
    pieces = np.where(inside, len(a), 1)
    refined_from = np.repeat(np.arange(len(t)), pieces)
    out = rows[refined_from]
    piece = np.arange(len(out)) - np.repeat(np.cumsum(pieces) - pieces, pieces)
    changed = inside[refined_from]
    gone = np.array(sorted(a), dtype=np.int64)[piece[changed]]
    out[changed] = np.where(out[changed] == gone[:, None], new, out[changed])
    coordinates = _with_point(t, a, rows, refined_from, changed, piece, new)
    notes: tuple[str, ...] = ()
    if t.coordinates is not None and coordinates is None:
        notes = ("coordinates dropped: the new label has no row in their table",)
    return Changed(labelled(out, words, coordinates), refined_from, [name], notes)


def _with_point(
    t: Triangulation,
    a: list[int],
    rows: np.ndarray,
    refined_from: np.ndarray,
    changed: np.ndarray,
    piece: np.ndarray,
    new: int,
) -> Coordinates | None:
    c = t.coordinates
    if c is None:
        return None
    if c.point is not None:
        if not 0 <= new <= len(c.point):
            return None
        middle = averages(c.point[sorted(a)], c.period)
        return c._replace(point=np.concatenate([c.point, middle[None]]))
    assert c.corner is not None
    chart = as_written_chart(t, c.corner)[refined_from]
    order = rows[refined_from]
    gone = order == np.array(sorted(a), dtype=np.int64)[np.where(changed, piece, 0)][:, None]
    mine = np.isin(order, a)
    weight = mine / np.maximum(mine.sum(axis=1, keepdims=True), 1)
    middle = (chart * weight[:, :, None]).sum(axis=1)
    put = gone & changed[:, None]
    return c._replace(corner=np.where(put[:, :, None], middle[:, None, :], chart))


# -- subdivisions by a template --------------------------------------------------------------------


def derived(triangulation: Triangulation, times: int = 1) -> Changed:
    """The barycentric subdivision, once or several times, of a complex or a gluing table.

    Every simplex falls into (D + 1)! pieces, one for each order of its corners: corner i of a piece is the
    barycentre of the first i + 1 of them.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled or a gluing table.
    times : int
        How often, at least 1.

    Returns
    -------
    Changed
        A labelled complex when it is a simplicial complex: always from a labelled one, and from a gluing
        table at the latest after two times (if no simplex is identified with itself other than by the
        identity, and no top simplices share all their corners beyond that).  Labels of a complex stay, the
        barycentres get new ones.

    References
    ----------
    J. R. Munkres, Elements of Algebraic Topology (1984), section 15.

    Examples
    --------
    >>> derived(Triangulation.from_facets([[0, 1, 2]])).triangulation
    <Triangulation 2D: 6 simplices, labelled, 6 boundary facets>
    """
    t = triangulation
    number(times, "times", 1)
    pieces = len(permutations_of(t.dimension).image)
    check_room(len(t) * pieces**times, t.dimension)
    result = _derived(t)
    for _ in range(times - 1):
        again = _derived(result.triangulation)
        result = Changed(again.triangulation, result.refined_from[again.refined_from])
    return Changed(result.triangulation, result.refined_from, new_labels_of(t, result.triangulation))


def refine(triangulation: Triangulation, factor: int) -> Changed:
    """The edgewise refinement: every segment falls into `factor` parts, every simplex into ``factor**D``.

    In the order of its corners a simplex is one of the path simplices of a cube; the pieces are the path
    simplices of the cubes of the finer grid that lie in it.  All of them have the same volume, and faces are
    refined likewise, so that neighbours fit.

    Parameters
    ----------
    triangulation : Triangulation
        Labelled (the order is that of the labels), or a gluing table whose gluings keep the order of the
        corners.
    factor : int
        At least 1.

    Raises
    ------
    InputError
        If a gluing does not keep the order; the barycentric subdivision has only gluings that do.

    References
    ----------
    H. Freudenthal, Simplizialzerlegungen von beschränkter Flachheit, Annals of Mathematics 43 (1942)
    580-582; H. Edelsbrunner, D. R. Grayson, Edgewise subdivision of a simplex, Discrete Comput. Geom. 24
    (2000) 707-719.

    Examples
    --------
    >>> refine(Triangulation.from_facets([[0, 1, 2, 3]]), 2).triangulation
    <Triangulation 3D: 8 simplices, labelled, 16 boundary facets>
    """
    t, d = triangulation, triangulation.dimension
    number(factor, "factor", 1)
    check_room(len(t) * factor**d, d)
    tables = permutations_of(d)
    slots = tables.image[t.rank, np.arange(d + 1)]
    keeps = (t.across < 0) | (t.rank == tables.keeping[np.arange(d + 1), slots])
    if not keeps.all():
        s, i = np.argwhere(~keeps)[0].tolist()
        raise InputError(
            "a gluing does not keep the order of the corners, on which this refinement depends",
            f"simplex {s}, slot {i}",
            "subdivide barycentrically first (derived 1): its gluings all do",
        )
    template = edgewise(d, factor)
    across, rank = glued_pieces(t, template)
    result = _finish(t, template, across, rank)
    return Changed(result.triangulation, result.refined_from, new_labels_of(t, result.triangulation))


def _derived(t: Triangulation) -> Changed:
    fine = first_derived(t)
    return _finish(t, barycentric(t.dimension), fine.across.astype(np.int64), fine.rank)


def _finish(t: Triangulation, template: Template, across: np.ndarray, rank: np.ndarray) -> Changed:
    """Labels where they name the simplices, and coordinates."""
    n, k = t.across.shape
    weight, piece, sign = template
    q = len(piece)
    refined_from = np.repeat(np.arange(n), q)
    written = (t.written[:, None] * sign).ravel().astype(np.int8)
    is_labelled = t.corners is not None and t.matched
    point_of, words = _points(t, weight)
    labels = point_of[:, piece].reshape(-1, k)
    chart = charts(t)
    period = None if t.coordinates is None else t.coordinates.period
    fine = None
    if chart is not None:
        fine = np.einsum("pc,nca->npa", weight / weight[0].sum(), chart)
    plain = Triangulation(across.astype(np.int32), rank, written)
    if is_labelled or labels_name_simplices(plain, labels):
        row = None
        if fine is not None and int(labels.min()) >= 0 and int(labels.max()) < 8 * labels.size:
            row = np.zeros((int(labels.max()) + 1, fine.shape[2]))
            if t.coordinates is not None and t.coordinates.point is not None and is_labelled:
                row[: len(t.coordinates.point)] = t.coordinates.point[: len(row)]
            flat, first = np.unique(point_of, return_index=True)
            row[flat] = fine.reshape(-1, fine.shape[2])[first]
            keep_chart = t.coordinates is not None and t.coordinates.corner is not None
            if keep_chart and not np.allclose(row[point_of], fine, rtol=0, atol=1e-9):
                row = None  # the charts do not fit together to one
        new = by_labels(across, rank, written, labels, words, row, period if row is not None else None)
        if fine is not None and row is None:
            order = np.argsort(labels if words is None else new_positions(labels, words), axis=1)
            corner = np.take_along_axis(fine[:, piece].reshape(n * q, k, -1), order[:, :, None], axis=1)
            new = with_fields(new, coordinates=Coordinates(corner=corner, period=period))
        return Changed(new, refined_from)
    if fine is not None:
        plain = with_fields(
            plain, coordinates=Coordinates(corner=fine[:, piece].reshape(n * q, k, -1), period=period)
        )
    return Changed(plain, refined_from)


def _points(t: Triangulation, weight: np.ndarray) -> tuple[np.ndarray, list[str] | None]:
    """Label of each point of the template in each simplex, (N, P), and the words where labels are words."""
    n, k = t.across.shape
    out = np.empty((n, len(weight)), dtype=np.int64)
    is_labelled = t.corners is not None and t.matched
    support = weight > 0
    size = support.sum(axis=1)
    total = 0
    for m in range(1, k + 1):
        chosen = np.flatnonzero(size == m)
        if not len(chosen):
            continue
        subsets = corner_subsets(k - 1, m)
        column = {tuple(c): x for x, c in enumerate(subsets.tolist())}
        columns = np.array([column[tuple(np.flatnonzero(support[p]).tolist())] for p in chosen])
        parts, part = np.unique([weight[p][support[p]] for p in chosen], axis=0, return_inverse=True)
        part = part.ravel()
        if is_labelled and m == 1:
            assert t.corners is not None
            out[:, chosen] = t.corners[:, columns]
            continue
        if m == k:
            numbers, count = np.arange(n)[:, None], n
        elif is_labelled:
            assert t.corners is not None
            rows = t.corners[:, subsets].reshape(-1, m)
            _, inverse = np.unique(rows, axis=0, return_inverse=True)
            numbers, count = inverse.reshape(n, -1), int(inverse.max()) + 1
        else:
            found = classes(t, m)
            numbers, count = found.number.astype(np.int64), found.count
        out[:, chosen] = total + numbers[:, columns] * len(parts) + part
        total += count * len(parts)
    if not is_labelled:
        return out, None
    new = size > 1
    if t.corner_names is None:
        out[:, new] += int(fresh_labels(t, total)[0]) if total else 0
        return out, None
    out[:, new] += len(t.corner_names)
    return out, [*t.corner_names, *fresh_words(t.corner_names, total)]
