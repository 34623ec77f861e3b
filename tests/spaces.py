"""Triangulations of the catalogue and their groups, as tests of the topology take them."""

import re

import numpy as np
from catalogue import CATALOGUE

from dualize import Triangulation


def listed(name):
    """A complex of the catalogue."""
    return Triangulation.from_facets(CATALOGUE[name].facets)


def glued(rows):
    """The gluing table of `catalogue.SMALL_GLUINGS`."""
    return Triangulation.from_gluings([[p[0] for p in r] for r in rows], [[p[1] for p in r] for r in rows])


def from_table(table):
    """The triangulation of a `reference.Table`, without its labels."""
    carry = [[p if p is not None else range(len(row)) for p in row] for row in table.carry]
    return Triangulation.from_gluings(table.across, carry, written=table.written)


def doubled(t):
    """Two copies of a bounded complex, glued along their boundaries by the identity."""
    n = len(t)
    open_slots = t.across < 0
    across, carry = np.array(t.across, dtype=int), np.array(t.carry, dtype=int)
    carry[open_slots] = np.arange(t.dimension + 1)
    there = np.where(open_slots, np.arange(n)[:, None] + n, across)
    back = np.where(open_slots, np.arange(n)[:, None], across + n)
    return Triangulation.from_gluings(np.concatenate([there, back]), np.concatenate([carry, carry]))


def factors(name):
    """The invariant factors of "Z^2+Z_2"."""
    out = []
    for word in re.split(r"\s*\+\s*", name):
        if match := re.fullmatch(r"Z(?:\^(\d+))?", word):
            out += [0] * int(match[1] or 1)
        elif word != "0":
            out.append(int(word.removeprefix("Z_")))
    return out


def over_field(groups, prime):
    """Betti numbers over Z_prime by the universal coefficient theorem (Munkres 1984, section 53)."""
    torsion = [sum(e > 0 and e % prime == 0 for e in g) for g in groups]
    return [g.count(0) + torsion[k] + (torsion[k - 1] if k else 0) for k, g in enumerate(groups)]
