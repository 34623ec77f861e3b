"""The boundary maps as Matrix Market files: a directory with ``d1.mtx``, ``d2.mtx`` and ``about.json``.

Rows of d1 are the vertices and then the nodes, its columns the edges and then the links; these are the rows
of d2, and its columns are the faces.  ``d1 d2 = 0``.  The order of the places and of the cells around a
face is lost, and a cell that a face or an edge visits twice has the sum of its signs.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from io import BytesIO
from typing import TYPE_CHECKING, Any

from ..errors import InputError
from ..skeleton import Skeleton

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["NAMES", "decode", "encode"]

ABOUT = "about.json"
NAMES = frozenset([ABOUT, "d1.mtx", "d2.mtx"])


def encode(skeleton: Skeleton) -> Iterator[tuple[str, Iterator[bytes]]]:
    """Names and contents of the files."""
    from ..topology.maps import foam_maps

    c = skeleton.counts
    edges = c["edges_internal"] + c["edges_external"]
    faces = c["faces_internal"] + c["faces_external"]
    cells = [
        _ranges(vertices=c["vertices"], nodes=c["nodes"]),
        _ranges(edges_internal=c["edges_internal"], edges_external=c["edges_external"], links=c["links"]),
        _ranges(faces_internal=c["faces_internal"], faces_external=c["faces_external"]),
    ]
    d1, d2 = foam_maps(skeleton)
    words = (
        f"boundary map d1 of a foam skeleton; rows: {c['vertices']} vertices, then {c['nodes']} nodes; "
        f"columns: {edges} edges (internal first), then {c['links']} links",
        f"boundary map d2 of a foam skeleton; rows: {edges} edges (internal first), then {c['links']} links; "
        f"columns: {faces} faces (internal first)",
    )
    about: dict[str, Any] = {"dimension": skeleton.dimension, "counts": dict(c), "matrices": {}}
    for name, matrix, text, rows, columns in zip(
        ("d1.mtx", "d2.mtx"), (d1, d2), words, cells[:2], cells[1:], strict=True
    ):
        about["matrices"][name] = {"meaning": text, "rows": rows, "columns": columns}
        yield name, iter([_market(matrix, text)])
    yield ABOUT, iter([(json.dumps(about, indent=1) + "\n").encode()])


def _ranges(**sizes: int) -> dict[str, list[int]]:
    """From where to where each kind of cell is numbered, from 0, the second number not included."""
    out, start = {}, 0
    for kind, size in sizes.items():
        out[kind] = [start, start + size]
        start += size
    return out


def _market(matrix: csc_array, comment: str) -> bytes:
    from scipy.io import mmwrite

    stream = BytesIO()
    # entries may add up to 0 where a face passes an edge in both directions
    matrix.eliminate_zeros()
    mmwrite(stream, matrix.tocoo(), comment=comment, field="integer", symmetry="general")
    return stream.getvalue()


def decode(files: Mapping[str, bytes]) -> tuple[csc_array, csc_array]:
    """The boundary maps d1 and d2 in the files.

    Raises
    ------
    InputError
        If one is missing or no matrix, or their shapes do not fit.
    """
    from scipy.io import mmread
    from scipy.sparse import csc_array

    maps = []
    for name in ("d1.mtx", "d2.mtx"):
        if name not in files:
            raise InputError("the file is missing", name)
        try:
            maps.append(csc_array(mmread(BytesIO(files[name]))))
        except (ValueError, OverflowError) as error:
            raise InputError(f"this is no Matrix Market file: {error}", name) from None
    d1, d2 = maps
    if d1.shape[1] != d2.shape[0]:
        raise InputError(f"d1 has {d1.shape[1]} columns, and d2 {d2.shape[0]} rows", "d2.mtx")
    return d1, d2
