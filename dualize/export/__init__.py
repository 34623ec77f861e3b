"""Skeletons in open forms, for programs that do not know this one.

    export          a skeleton as tables, matrices, a graph or a mesh
    read_export     what can be read back of them
    KINDS           the forms and what each leaves out

Every form is a module with pure functions from the skeleton to text, bytes or a mesh, and back where the form
allows it; files are made here, whole or not at all.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator, Sequence
from contextlib import nullcontext
from typing import TYPE_CHECKING, Any, NamedTuple

from ..errors import DualizeError, InputError
from ..skeleton import Skeleton

if TYPE_CHECKING:
    from os import PathLike

    import numpy as np

__all__ = ["KINDS", "Kind", "export", "read_export"]


class Kind(NamedTuple):
    """A form of export.

    Attributes
    ----------
    title : str
        What is written.
    drops : str
        What it leaves out, or the empty string.
    folder : bool
        Whether it is a directory.
    """

    title: str
    drops: str
    folder: bool = False


KINDS = {
    "tables": Kind("a directory of CSV tables, one for each kind of cell, and about.json", "", True),
    "matrices": Kind(
        "a directory with the boundary maps d1 and d2 as Matrix Market files, and about.json",
        "the order of places and of the cells around a face, labels, coordinates, further groups",
        True,
    ),
    "graphml": Kind(
        "the dual graph or the boundary graph as GraphML",
        "the order of the edges around a face, coordinates, further groups",
    ),
    "node-link": Kind(
        "the dual graph or the boundary graph as node-link JSON",
        "the order of the edges around a face, coordinates, further groups",
    ),
    "dot": Kind(
        "the dual graph or the boundary graph in the DOT language, for drawing",
        "faces, places, signs, coordinates, further groups",
    ),
    "vtk": Kind(
        "the dual one- and two-skeleton as a VTK mesh (.vtk or .vtu)",
        "gluings except by number, the boundary graph, labels, further groups",
    ),
    "einsum": Kind(
        "the network of vertex tensors as JSON: einsum text, index arrays, an order, signs",
        "the order of the cells around a face, the boundary graph, labels, coordinates, further groups",
    ),
}

GRAPHS = ("graphml", "node-link", "dot")


def export(
    skeleton: Skeleton,
    path: str | PathLike[str],
    kind: str,
    *,
    force: bool = False,
    graph: str | None = None,
    axes: Sequence[int] | None = None,
    projection: np.ndarray | None = None,
) -> None:
    """Write a skeleton in an open form; `KINDS` says what each leaves out.

    Parameters
    ----------
    skeleton : Skeleton
    path : path, or ``"-"`` for standard output (graphs and networks only)
        A directory for ``tables`` and ``matrices``, a file for the others.
    kind : str
        ``tables``, ``matrices``, ``graphml``, ``node-link``, ``dot``, ``vtk`` or ``einsum``.
    force : bool
        Replace an existing file, or an existing directory that holds such an export and nothing else.
    graph : str, optional
        ``dual`` (the default) or ``boundary``: which graph ``graphml``, ``node-link`` and ``dot`` write.
    axes : sequence of int, optional
        Up to three axes of the coordinates that ``vtk`` shows; the first three by default.
    projection : array_like of float, shape (3, A), optional
        Applied to the coordinates instead.

    Raises
    ------
    InputError
        If the kind is not known, the skeleton has no coordinates where they are needed, something is there
        already and `force` is false, or it cannot be written.  Then nothing is written.

    Examples
    --------
    >>> import tempfile
    >>> from dualize import Triangulation, build, export
    >>> s = build(Triangulation.from_facets([[0, 1, 2, 3], [1, 2, 3, 4]]))
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     export(s, folder + "/maps", "matrices")
    ...     print(*sorted(os.listdir(folder + "/maps")))
    about.json d1.mtx d2.mtx
    """
    from . import einsum, graphs, matrices, tables, vtk
    from .folder import write_folder

    name = os.fsdecode(path)
    form = _kind(kind)
    if kind != "vtk" and (axes is not None or projection is not None):
        raise InputError(f"{kind} has no coordinates, so axes and projections do not apply to it")
    if graph is not None and kind not in GRAPHS:
        raise InputError(
            f"{kind} is no graph, so there is none to choose", hint=f"graphs are {', '.join(GRAPHS)}"
        )
    if form.folder:
        module = tables if kind == "tables" else matrices
        if name == "-":
            raise InputError(f"{kind} is a directory, which standard output cannot be", hint="give a name")
        write_folder(name, module.encode(skeleton), module.NAMES, force)
    elif kind == "vtk":
        _write_mesh(vtk.dual_mesh(skeleton, axes, projection), name, force)
    elif kind == "einsum":
        _write_lines(einsum.network_lines(skeleton), name, force)
    else:
        lines: dict[str, Callable[[Any], Iterator[bytes]]] = {
            "graphml": graphs.graphml_lines,
            "node-link": graphs.node_link_lines,
            "dot": graphs.dot_lines,
        }
        _write_lines(lines[kind](graphs.graph_of(skeleton, graph or "dual")), name, force)


def read_export(path: str | PathLike[str], kind: str) -> Any:
    """Read an export back.

    Parameters
    ----------
    path : path
    kind : str
        ``tables`` gives a Skeleton (validated), ``matrices`` the sparse maps ``(d1, d2)``, ``graphml`` and
        ``node-link`` a `networkx.MultiDiGraph` as `Skeleton.dual_graph` or `Skeleton.boundary_graph` makes
        it.

    Raises
    ------
    InputError, SkeletonError
        If it cannot be read, is damaged, or is a form that is not read back.
    """
    from . import graphs, matrices, tables
    from .folder import read_folder

    name = os.fsdecode(path)
    form = _kind(kind)
    try:
        if kind == "tables":
            skeleton = tables.decode(read_folder(name, tables.NAMES))
            skeleton.validate()
            return skeleton
        if kind == "matrices":
            return matrices.decode(read_folder(name, matrices.NAMES))
        if kind not in ("graphml", "node-link"):
            raise InputError(f"{form.title} is not read back")
        with open(name, "rb") as stream:
            data = stream.read()
        return graphs.from_graphml(data) if kind == "graphml" else graphs.from_node_link(data)
    except DualizeError as error:
        raise error.at(name) from None
    except OSError as error:
        raise InputError(f"it cannot be read: {error.strerror or error}", name) from None


def _kind(kind: str) -> Kind:
    if kind not in KINDS:
        raise InputError(f"there is no export as {kind!r}", hint="known are: " + ", ".join(KINDS))
    return KINDS[kind]


def _write_lines(lines: Iterator[bytes], name: str, force: bool) -> None:
    from ..formats.target import replacing

    if name == "-":
        sys.stdout.flush()
    with nullcontext((sys.stdout.buffer, None)) if name == "-" else replacing(name, force) as (stream, _):
        for line in lines:
            stream.write(line)
        stream.flush()


def _write_mesh(mesh: Any, name: str, force: bool) -> None:
    """A mesh in the format of the suffix."""
    import io
    from contextlib import redirect_stdout

    import meshio

    from ..formats.target import replacing
    from .vtk import SUFFIXES

    suffix = os.path.splitext(name)[1].lower()
    if suffix not in SUFFIXES:
        raise InputError("the name of a mesh ends with .vtk or .vtu", name)
    with replacing(name, force) as (_, temporary), redirect_stdout(io.StringIO()):
        meshio.write(temporary or name, mesh, file_format=SUFFIXES[suffix])
