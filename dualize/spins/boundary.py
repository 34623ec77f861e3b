"""Boundary data: a spin for every link and an intertwiner for every node, as a document.

    {
      "format": "foam-boundary-data", "version": 1,
      "all": 2,
      "links": [{"corners": [1, 2, 3], "spin": 1}, ...],
      "nodes": [{"corners": [0, 1, 2, 3], "pairing": 0, "recoupling": 2}, ...]
    }

Spins are twice-spins.  ``all`` is the spin of the links that are not listed.  A link or node is named by the
labels of its corners, in any order, so that one document serves every foam with that boundary; where a foam
has no labels, or labels name several, by its number (``"link": 4``, ``"node": 0``).  An intertwiner is a
recoupling spin in one of the three pairings 0: (0 1)(2 3), 1: (0 2)(1 3), 2: (0 3)(1 2) of the places, or a
``vector`` over the recoupling spins of pairing 0, ascending; a complex entry is a pair ``[re, im]``.  Nodes
that are not listed stay open.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from ..errors import InputError
from ..match import Match
from ..skeleton import Skeleton
from .recoupling import overlap
from .rules import (
    LARGEST_SPIN,
    PAIRINGS,
    check_nodes,
    intertwiner_dimension,
    link_spins,
    place,
    recoupling_range,
)

__all__ = ["BoundaryData", "boundary_data", "boundary_template"]

FORMAT, VERSION = "foam-boundary-data", 1


@dataclass(frozen=True, eq=False)
class BoundaryData:
    """Spins of the links and states of the nodes of one foam.

    Attributes
    ----------
    spins : ndarray of int64, shape (L,)
        Twice-spins.
    states : dict of int to ndarray
        For each node that is not open a vector over the recoupling spins of pairing 0, ascending.
    sign : int
        +1 or -1: a factor of the whole state, from directions that were turned around by `carried`.
    """

    spins: np.ndarray
    states: dict[int, np.ndarray] = field(default_factory=dict)
    sign: int = 1

    def __repr__(self) -> str:
        return f"<BoundaryData: {len(self.spins)} links, {len(self.states)} nodes with a state>"

    def carried(self, found: Match, old: Skeleton, new: Skeleton) -> BoundaryData:
        """The same data on another foam.

        Parameters
        ----------
        found : Match
            A map from the boundary of `old` to that of `new`, as `dualize.match` finds it.
        old, new : Skeleton

        Notes
        -----
        A state is a real vector of the product of the spins at its node, with a leg lowered by
        ``|m> -> (-1)**(j-m) <-m|`` where the face runs against the edge.  Places are permuted by a change of
        basis; a leg that is raised where it was lowered costs ``(-1)**(2j)``.
        """
        spins = np.empty_like(self.spins)
        spins[found.links] = self.spins
        inner = old.counts["edges_internal"]
        against = old["edges/face_sign"][inner:] < 0
        links = old["nodes/link"]
        turned = (found.link_sign < 0)[links] if len(links) else np.zeros(links.shape, dtype=bool)
        odd = int(self.spins[links][turned & against].sum()) if len(links) else 0
        against = against ^ turned
        flipped = old["nodes/orientation"] != new["nodes/orientation"][found.nodes]
        odd += int(self.spins[links[flipped]][against[flipped]].sum()) if len(links) else 0
        states = {}
        for n, state in self.states.items():
            m = int(found.nodes[n])
            at = self.spins[links[n]].tolist()
            # place k of the old node is place found.places[n][k] of the new one
            back = np.argsort(found.places[n]).tolist()
            order = [back[p] for p in range(len(at))]
            states[m] = overlap(at, order, list(range(len(at)))) @ state
        return BoundaryData(spins, states, self.sign * (-1 if odd % 2 else 1))


def boundary_data(skeleton: Skeleton, document: Mapping[str, Any] | int) -> BoundaryData:
    """Boundary data of a foam from a document, checked.

    Parameters
    ----------
    skeleton : Skeleton
    document : mapping or int
        As the module describes; an integer is the twice-spin of all links.

    Raises
    ------
    InputError
        Naming the entry, the link or the node, and what is wrong with it.
    """
    if not isinstance(document, Mapping):
        document = {"all": document}
    unknown = set(document) - {"format", "version", "all", "links", "nodes", "about"}
    if unknown:
        raise InputError(f"boundary data have no entry {min(map(str, unknown))!r}", hint=HINT)
    if document.get("format", FORMAT) != FORMAT:
        raise InputError(f"the format is {document['format']!r}, not {FORMAT!r}", hint=HINT)
    if document.get("version", VERSION) != VERSION:
        raise InputError(
            f"version {document['version']!r} of boundary data is not known", hint="write version 1"
        )
    default = document.get("all")
    links = skeleton.counts["links"]
    spins = np.full(links, -1 if default is None else _spin(default, "all"), dtype=np.int64)
    names = {kind: _names(skeleton, kind) for kind in ("link", "node")}
    seen: set[int] = set()
    for number, entry in enumerate(_entries(document, "links")):
        where = f"links[{number}]"
        link = _cell(skeleton, "link", entry, names["link"], where, {"spin"})
        if link in seen:
            raise InputError("the link is listed twice", f"{where}, {place(skeleton, 'link', link)}")
        seen.add(link)
        if "spin" not in entry or entry["spin"] is None:
            raise InputError("the spin is missing", f"{where}, {place(skeleton, 'link', link)}")
        spins[link] = _spin(entry["spin"], where)
    if (spins < 0).any():
        link = int(np.flatnonzero(spins < 0)[0])
        raise InputError(
            f"{int((spins < 0).sum())} of {links} links have no spin", place(skeleton, "link", link),
            'list it under "links", or give "all"',
        )  # fmt: skip
    spins = link_spins(skeleton, spins)
    check_nodes(skeleton, spins)
    states: dict[int, np.ndarray] = {}
    for number, entry in enumerate(_entries(document, "nodes")):
        where = f"nodes[{number}]"
        node = _cell(skeleton, "node", entry, names["node"], where, {"pairing", "recoupling", "vector"})
        if node in states:
            raise InputError("the node is listed twice", f"{where}, {place(skeleton, 'node', node)}")
        state = _state(
            entry, spins[skeleton["nodes/link"][node]], f"{where}, {place(skeleton, 'node', node)}"
        )
        if state is not None:
            states[node] = state
    return BoundaryData(spins, states)


HINT = "dualize plan FOAM --template shows what boundary data look like"


def boundary_template(skeleton: Skeleton, spin: int | None = None) -> dict[str, Any]:
    """A document of boundary data to be filled in: every link and node with what names it.

    Parameters
    ----------
    skeleton : Skeleton
    spin : int, optional
        Twice-spin that is filled in everywhere; null by default.
    """
    document: dict[str, Any] = {"format": FORMAT, "version": VERSION}
    for kind, count in (("link", skeleton.counts["links"]), ("node", skeleton.counts["nodes"])):
        names = _names(skeleton, kind)
        rows = []
        for n in range(count):
            row: dict[str, Any] = {}
            table = f"{kind}s/corners"
            if table in skeleton:
                labels = skeleton.named(skeleton[table][n])
                if len(names[tuple(sorted(labels, key=str))]) == 1:
                    row["corners"] = labels
            if not row:
                row[kind] = n
            if kind == "link":
                row["spin"] = spin
            elif skeleton.dimension == 4:
                row |= {"pairing": 0, "recoupling": None}
            rows.append(row)
        if kind == "link" or skeleton.dimension == 4:
            document[f"{kind}s"] = rows
    return document


def _names(skeleton: Skeleton, kind: str) -> dict[tuple, list[int]]:
    """Links or nodes by their labels, in the order of text."""
    table = f"{kind}s/corners"
    out: dict[tuple, list[int]] = {}
    if table in skeleton:
        for n, labels in enumerate(skeleton.named(skeleton[table])):
            out.setdefault(tuple(sorted(labels, key=str)), []).append(n)
    return out


def _entries(document: Mapping[str, Any], key: str) -> list[Mapping[str, Any]]:
    entries = document.get(key, [])
    if not isinstance(entries, list) or not all(isinstance(e, Mapping) for e in entries):
        raise InputError(f'"{key}" is not a list of objects', hint=HINT)
    return entries


def _spin(value: Any, where: str) -> int:
    if not isinstance(value, int) or isinstance(value, bool) or not 0 <= value <= LARGEST_SPIN:
        raise InputError(
            f"a twice-spin is an integer from 0 on, not {value!r}", where, "1 stands for spin 1/2"
        )
    return value


def _cell(
    skeleton: Skeleton, kind: str, entry: Mapping[str, Any], names: dict, where: str, more: set[str]
) -> int:
    """The number of the link or node that an entry names."""
    unknown = set(entry) - {kind, "corners", "about"} - more
    if unknown:
        raise InputError(f"the entry of a {kind} has no {min(map(str, unknown))!r}", where, HINT)
    if kind in entry:
        number = entry[kind]
        count = skeleton.counts[f"{kind}s"]
        if not isinstance(number, int) or isinstance(number, bool) or not 0 <= number < count:
            raise InputError(f"there is no {kind} {number!r}", where, f"there are {count}, numbered from 0")
        return int(number)
    if "corners" not in entry or not isinstance(entry["corners"], list):
        raise InputError(f"the {kind} is not named", where, f'give its "corners", or its number as "{kind}"')
    if not names:
        raise InputError(
            f"this foam has no labels, so corners name no {kind}", where, f'give its number as "{kind}"'
        )
    labels = tuple(sorted(entry["corners"], key=str))
    found = names.get(labels, [])
    if len(found) != 1:
        text = " ".join(map(str, entry["corners"]))
        what = f"no {kind} has" if not found else f"{len(found)} {kind}s have"
        hint = HINT if not found else f'give its number as "{kind}": {", ".join(map(str, found))}'
        raise InputError(f"{what} the corners {text}", where, hint)
    return int(found[0])


def _state(entry: Mapping[str, Any], spins: np.ndarray, where: str) -> np.ndarray | None:
    """The state of a node as a vector in pairing 0; None where the node stays open."""
    size = int(intertwiner_dimension(spins))
    if "vector" in entry:
        if entry.get("recoupling") is not None:
            raise InputError("a node has a recoupling spin or a vector, not both", where)
        try:
            rows = [complex(*x) if isinstance(x, list) else complex(x) for x in entry["vector"]]
            vector = np.array(rows)
        except (TypeError, ValueError):
            raise InputError("the vector is no list of numbers, or of pairs of them", where) from None
        if vector.shape != (size,):
            raise InputError(
                f"the vector has {len(vector)} entries, and there are {size} intertwiners", where
            )
        if not np.isfinite(vector).all():
            raise InputError("the vector has an entry that is no number", where)
        return vector.real if not vector.imag.any() else vector
    recoupling = entry.get("recoupling")
    if recoupling is None:
        return None
    if len(spins) != 4:
        raise InputError("only nodes of a 4D foam have a recoupling spin", where)
    pairing = entry.get("pairing", 0)
    if type(pairing) is not int or not 0 <= pairing < 3:
        raise InputError(f"the pairing is {pairing!r}", where, "0: (0 1)(2 3), 1: (0 2)(1 3), 2: (0 3)(1 2)")
    least, greatest = (int(x) for x in recoupling_range(spins, pairing))
    if type(recoupling) is not int or not least <= recoupling <= greatest or (recoupling - least) % 2:
        raise InputError(
            f"the recoupling spin {recoupling!r} is not possible in pairing {pairing}", where,
            f"twice-spins from {least} to {greatest} in steps of 2",
        )  # fmt: skip
    unit = np.zeros(size)
    unit[(recoupling - least) // 2] = 1
    back: np.ndarray = overlap(spins.tolist(), PAIRINGS[0], PAIRINGS[pairing]) @ unit
    return back
