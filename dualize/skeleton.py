"""The foam skeleton: the oriented dual two-complex with its boundary graph, as flat arrays.

Two tetrahedra (0 1 2 3) and (0 1 2 4) that share a triangle have the dual

      node ──▶── vertex 0 ───edge 0───▶ vertex 1 ──▶── node      (and two more nodes at either vertex)

one internal edge, six external edges that end on the six nodes of the boundary graph, and nine faces, one
for every segment of the triangulation; each is open here and closes over a link of the boundary graph.  The
boundary of an external face is its signed edges plus its link, so that ``d1 d2 = 0`` holds exactly with
nodes and links included.  `dualize.layout.TABLES` lists every table; ``dualize spec`` prints the conventions.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

import numpy as np

from .errors import SkeletonError
from .layout import TABLES, sizes, wedge_pairs

if TYPE_CHECKING:
    from os import PathLike

    import networkx
    from matplotlib.figure import Figure

__all__ = ["Group", "Skeleton"]


class Group:
    """The tables of one group as attributes: ``skeleton.edges.face`` is ``skeleton["edges/face"]``."""

    def __init__(self, name: str, arrays: Mapping[str, np.ndarray]) -> None:
        self._name = name
        self._arrays = arrays

    def __getattr__(self, key: str) -> np.ndarray:
        try:
            return self._arrays[f"{self._name}/{key}"]
        except KeyError:
            raise AttributeError(f"this skeleton has no table {self._name}/{key}") from None

    def __dir__(self) -> list[str]:
        return [name.split("/", 1)[1] for name in self._arrays if name.startswith(self._name + "/")]

    def __repr__(self) -> str:
        rows = [f"{key} {getattr(self, key).shape} {getattr(self, key).dtype}" for key in dir(self)]
        return f"<{self._name}: " + ", ".join(rows) + ">"


@dataclass(frozen=True, eq=False, repr=False)
class Skeleton:
    """An oriented dual two-complex with its boundary graph.

    Made by `dualize.build` or `dualize.load`; nothing in it changes afterwards (its arrays are read-only).

    Parameters
    ----------
    dimension : int
        D, the dimension of the triangulation: 2, 3 or 4.
    counts : mapping of str to int
        ``vertices``, ``edges_internal``, ``edges_external``, ``faces_internal``, ``faces_external``,
        ``nodes``, ``links``, ``components``.
    flags : mapping
        ``orientable`` (a list of bool, one per component), ``ordered`` and ``singular`` (bool).
    arrays : mapping of str to ndarray
        The tables under the names of the layout, such as ``"edges/face"``.
    corner_names : tuple of str, optional
        The words, where labels are words; labels are positions in it.
    provenance : mapping, optional
        Where the file came from; None in memory.
    extra : mapping
        Groups this version does not know, carried along unchanged: name with ``/`` to array or JSON value.
    """

    dimension: int
    counts: Mapping[str, int]
    flags: Mapping[str, Any]
    arrays: Mapping[str, np.ndarray]
    corner_names: tuple[str, ...] | None = None
    provenance: Mapping[str, Any] | None = None
    extra: Mapping[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        frozen = {}
        for name, array in self.arrays.items():
            view = np.ascontiguousarray(array).view()
            view.flags.writeable = False
            frozen[name] = view
        object.__setattr__(self, "arrays", MappingProxyType(frozen))
        object.__setattr__(self, "counts", MappingProxyType(dict(self.counts)))
        object.__setattr__(self, "flags", MappingProxyType(dict(self.flags)))
        object.__setattr__(self, "extra", MappingProxyType(dict(self.extra)))

    # -- the tables --------------------------------------------------------------------------------

    def __getitem__(self, name: str) -> np.ndarray:
        return self.arrays[name]

    def __contains__(self, name: object) -> bool:
        return name in self.arrays

    def __getattr__(self, name: str) -> Group:
        if name in _GROUPS:
            return Group(name, self.arrays)
        raise AttributeError(f"a Skeleton has no attribute {name!r}")

    def __reduce__(self) -> tuple:
        return _restore, (
            self.dimension,
            dict(self.counts),
            dict(self.flags),
            dict(self.arrays),
            self.corner_names,
            None if self.provenance is None else dict(self.provenance),
            dict(self.extra),
        )

    def __eq__(self, other: object) -> bool:
        """Equal when all tables, counts, flags, names and further groups are; provenance does not count."""
        if not isinstance(other, Skeleton):
            return NotImplemented
        return (
            self.dimension == other.dimension
            and dict(self.counts) == dict(other.counts)
            and dict(self.flags) == dict(other.flags)
            and self.corner_names == other.corner_names
            and same_tables(self.arrays, other.arrays)
            and same_tables(self.extra, other.extra)
        )

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        c = self.counts
        return (
            f"<Skeleton {self.dimension}D: {c['vertices']} vertices, "
            f"{c['edges_internal']}+{c['edges_external']} edges, "
            f"{c['faces_internal']}+{c['faces_external']} faces, "
            f"{c['nodes']} nodes, {c['links']} links, {c['components']} component(s)>"
        )

    # -- single cells ------------------------------------------------------------------------------

    def face(self, number: int) -> list[tuple[str, int, int]]:
        """The cells of a face in order: ``("vertex", id, wedge)`` and ``("edge", id, sign)`` in turn.

        An internal face begins with a vertex, an external one with the edge from its first node.
        """
        number = self._id(number, "face")
        v0, v1 = self["faces/vertex_offsets"][number : number + 2]
        e0, e1 = self["faces/edge_offsets"][number : number + 2]
        vertices = [
            ("vertex", int(v), int(w))
            for v, w in zip(self["faces/vertex"][v0:v1], self["faces/wedge"][v0:v1], strict=True)
        ]
        edges = [
            ("edge", int(e), int(x))
            for e, x in zip(self["faces/edge"][e0:e1], self["faces/edge_sign"][e0:e1], strict=True)
        ]
        first, second = (vertices, edges) if number < self.counts["faces_internal"] else (edges, vertices)
        out = [cell for pair in zip(first, second, strict=False) for cell in pair]
        return out + first[len(second) :]

    def edges_at(self, vertex: int) -> list[tuple[int, int]]:
        """``(edge, +1 or -1)`` at each slot of a vertex; +1 where the edge leaves it."""
        vertex = self._id(vertex, "vertex")
        return list(
            zip(self["vertices/edge"][vertex].tolist(), self["vertices/leaves"][vertex].tolist(), strict=True)
        )

    def _id(self, number: int, kind: str) -> int:
        n = sizes(self.dimension, dict(self.counts))["V" if kind == "vertex" else "F"]
        if not 0 <= number < n:
            raise SkeletonError(f"there is no {kind} {number}", hint=f"{kind} numbers run from 0 to {n - 1}")
        return int(number)

    # -- graphs ------------------------------------------------------------------------------------

    def dual_graph(self) -> networkx.MultiDiGraph:
        """The vertices and edges of the foam as a directed multigraph.

        Vertices are ``0 .. V - 1`` (attributes ``orientation``, ``component``, and ``corners`` where there
        are labels); a node of the boundary is ``("node", n)``.  Every edge has its number as key and
        ``edge``, ``twist``, ``source_slot``, ``target_slot`` (-1 at a node), ``faces``, ``face_signs``
        (both by place), ``source_corners`` and ``target_corners``.
        """
        import networkx

        graph = networkx.MultiDiGraph(dimension=self.dimension, kind="dual graph")
        corners = self.arrays.get("vertices/corners")
        labels = None if corners is None else self.named(corners)
        for v, (sign, part) in enumerate(
            zip(self["vertices/orientation"].tolist(), self["vertices/component"].tolist(), strict=True)
        ):
            graph.add_node(v, orientation=sign, component=part)
            if labels is not None:
                graph.nodes[v]["corners"] = tuple(labels[v])
        for n, sign in enumerate(self["nodes/orientation"].tolist()):
            graph.add_node(("node", n), orientation=sign)
        rows = (
            self[f"edges/{key}"].tolist()
            for key in ("source", "target", "twist", "face", "face_sign", "source_corner", "target_corner")
        )
        for e, (source, target, twist, faces, signs, at_source, at_target) in enumerate(
            zip(*rows, strict=True)
        ):
            graph.add_edge(
                *(end[0] if end[0] >= 0 else ("node", end[1]) for end in (source, target)),
                key=e,
                edge=e,
                twist=twist,
                source_slot=source[1] if source[0] >= 0 else -1,
                target_slot=target[1] if target[0] >= 0 else -1,
                faces=tuple(faces),
                face_signs=tuple(signs),
                source_corners=tuple(at_source),
                target_corners=tuple(at_target),
            )
        return graph

    def boundary_graph(self) -> networkx.MultiDiGraph:
        """The nodes and links of the boundary as a directed multigraph.

        Nodes are ``0 .. B - 1`` with ``edge``, ``vertex``, ``slot``, ``orientation``, ``component``,
        ``links`` and ``link_leaves`` (both by place), and ``corners`` where there are labels.  Every link
        has its number as key and ``link``, ``face``, ``twist``, ``source_place``, ``target_place``, and
        ``corners``.
        """
        import networkx

        graph = networkx.MultiDiGraph(dimension=self.dimension, kind="boundary graph")
        keys = ("edge", "vertex", "slot", "orientation", "component", "link", "link_leaves")
        places: dict[tuple[int, int], int] = {}
        rows = (self[f"nodes/{key}"].tolist() for key in keys)
        for n, (edge, vertex, slot, sign, part, links, leaves) in enumerate(zip(*rows, strict=True)):
            graph.add_node(
                n,
                edge=edge,
                vertex=vertex,
                slot=slot,
                orientation=sign,
                component=part,
                links=tuple(links),
                link_leaves=tuple(leaves),
            )
            for place, (link, out) in enumerate(zip(links, leaves, strict=True)):
                places[link, out] = place
        rows = (self[f"links/{key}"].tolist() for key in ("source", "target", "face", "twist"))
        for link, (source, target, face, twist) in enumerate(zip(*rows, strict=True)):
            graph.add_edge(
                source,
                target,
                key=link,
                link=link,
                face=face,
                twist=twist,
                source_place=places[link, 1],
                target_place=places[link, -1],
            )
        if "nodes/corners" in self:
            for n, labels in enumerate(self.named(self["nodes/corners"])):
                graph.nodes[n]["corners"] = tuple(labels)
            for link, labels in enumerate(self.named(self["links/corners"])):
                graph.edges[graph_link(self, link)]["corners"] = tuple(labels)
        return graph

    def named(self, labels: np.ndarray) -> list:
        """Labels as nested lists, as words where the triangulation was written in words."""
        if self.corner_names is None:
            return labels.tolist()
        return np.asarray(self.corner_names, dtype=object)[labels].tolist()

    def wedge(self, number: int) -> tuple[int, int]:
        """The slots (i, j) of a wedge number."""
        return wedge_pairs(self.dimension)[number]

    # -- files and checks --------------------------------------------------------------------------

    def validate(self) -> None:
        """Check shapes, ranges, offsets, that the tables agree, and ``d1 d2 = 0``.

        Raises
        ------
        SkeletonError
            Naming the first wrong entry.
        """
        from .check import check_skeleton

        check_skeleton(self)

    def write(
        self,
        path: str | PathLike[str],
        *,
        force: bool = False,
        kind: str | None = None,
        compress: bool = False,
    ) -> None:
        """Write the skeleton; the suffix (or `kind`: ``json``, ``hdf5``, ``npz``) decides the format.

        Raises
        ------
        InputError
            If the file exists and `force` is false, or the format is not known.
        """
        from .formats import write

        write(self, path, force=force, kind=kind, compress=compress)

    # -- pictures ----------------------------------------------------------------------------------

    def draw(self, part: str | None = None, **options: Any) -> Figure:
        """A picture of a part of the foam as a matplotlib figure.

        Parameters
        ----------
        part : str, optional
            ``boundary``, ``dual``, ``vertex``, ``face``, ``degrees`` or ``space``; by default the boundary
            graph, or the dual graph where there is no boundary.
        **options
            ``number``, ``most``, ``component``, ``axes``, ``projection``, ``view``: `dualize.draw.sketch`.

        Returns
        -------
        matplotlib.figure.Figure

        Raises
        ------
        InputError
            If the part, an option or a cell does not exist, or there are no coordinates to draw in space.
        """
        from .draw import picture

        return picture(self, part, **options)

    def _repr_html_(self) -> str:
        """A small table, for notebooks."""
        from .draw.notebook import skeleton_table

        return skeleton_table(self)


def graph_link(skeleton: Skeleton, link: int) -> tuple[int, int, int]:
    """The key of a link in the boundary graph: source, target, number."""
    return int(skeleton["links/source"][link]), int(skeleton["links/target"][link]), link


def same_tables(one: Mapping[str, Any], two: Mapping[str, Any]) -> bool:
    """Whether two mappings hold the same names with the same arrays (dtype, shape, entries) or values."""
    if one.keys() != two.keys():
        return False
    for name in one:
        a, b = one[name], two[name]
        if isinstance(a, np.ndarray) or isinstance(b, np.ndarray):
            if not (isinstance(a, np.ndarray) and isinstance(b, np.ndarray)):
                return False
            if (
                a.dtype != b.dtype
                or a.shape != b.shape
                or not np.array_equal(a, b, equal_nan=a.dtype.kind == "f")
            ):
                return False
        elif a != b:
            return False
    return True


def _restore(*parts: Any) -> Skeleton:
    return Skeleton(*parts)


_GROUPS = frozenset(name.split("/")[0] for name in TABLES)
