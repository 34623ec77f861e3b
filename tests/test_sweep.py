"""Single changed entries, thousands of them, in every table of many skeletons: each is noticed."""

import numpy as np
import pytest
from damage import SPECIMENS, specimen, with_entry

from dualize import SkeletonError
from dualize.check import check_skeleton
from dualize.layout import TABLES, sizes

# What cannot be noticed by looking at the file alone, and why.
UNNOTICED = {
    "coordinates/point": "a coordinate is not used by the dual",
    "coordinates/corner": "a coordinate is not used by the dual",
    "coordinates/period": "a period is not used by the dual",
}
SMALL = 400  # skeletons with at most so many entries are swept entry by entry; half of it, with every value
SAMPLE = 25  # entries of each table of the others


def other_values(skeleton, name, value):
    """Every other value of the entry's kind where those are few, else its neighbours, some at random; some
    that are out of range."""
    kind = TABLES[name].kind
    size = sizes(skeleton.dimension, dict(skeleton.counts))
    letter = {
        "vertex": "V",
        "edge": "E",
        "face": "F",
        "node": "B",
        "link": "L",
        "component": "V",
        "boundary": "B",
    }
    if kind == "sign":
        values = {-value, 0, 2}
    elif kind in letter:
        values = set(range(-2, size[letter[kind]] + 2))
    elif kind in ("offset", "end", "point", "segment"):
        values = {-1, 0, 1, value - 2, value - 1, value + 1, value + 2, 10**6}
    elif kind == "label":
        values = {value - 1, value + 1, 0, -1, 2**62}
    else:  # bits, corners, slots, places, wedges, singular, segment signs
        values = set(range(-2, 11))
    return sorted(values - {value})


def entry_count(skeleton):
    return sum(table.size for table in skeleton.arrays.values())


def entries(skeleton, name, random):
    """Indices of a table: all of them in a small skeleton, else a sample."""
    table = skeleton[name]
    if entry_count(skeleton) <= SMALL or table.size <= SAMPLE:
        return range(table.size)
    return sorted(random.choice(table.size, SAMPLE, replace=False).tolist())


@pytest.mark.parametrize("name", SPECIMENS)
def test_undamaged_skeleton_passes(name):
    check_skeleton(specimen(name))


@pytest.mark.parametrize("name", SPECIMENS)
def test_every_single_changed_entry_is_noticed(name):
    skeleton = specimen(name)
    random = np.random.default_rng(len(name))
    tiny = entry_count(skeleton) <= SMALL // 2
    missed, changes = [], 0
    for table in skeleton.arrays:
        if table in UNNOTICED:
            continue
        for flat in entries(skeleton, table, random):
            index = np.unravel_index(flat, skeleton[table].shape)
            values = other_values(skeleton, table, int(skeleton[table][index]))
            if len(values) > 8 and not tiny:
                values = random.choice(values, 8, replace=False).tolist()
            for value in values:
                changes += 1
                try:
                    check_skeleton(with_entry(skeleton, table, index, value))
                except SkeletonError as error:
                    assert "[" in error.where or error.where.startswith(("counts", "flags")), error
                else:
                    missed.append((table, *map(int, index), value))
    assert not missed, f"{len(missed)} of {changes} changes were not noticed: {missed[:10]}"
    assert changes > 200


@pytest.mark.parametrize("table", UNNOTICED)
def test_the_list_of_what_cannot_be_noticed_is_exact(table):
    skeleton = specimen("coordinates")
    check_skeleton(with_entry(skeleton, table, 0, 17.5))


def test_every_table_of_the_layout_is_swept():
    swept = {table for name in SPECIMENS for table in specimen(name).arrays}
    assert swept == set(TABLES)


def test_the_sweep_meets_all_kinds_of_skeletons():
    skeletons = [specimen(name) for name in SPECIMENS]
    assert {s.dimension for s in skeletons} == {2, 3, 4}
    assert any(not s.flags["ordered"] for s in skeletons)
    assert any(not all(s.flags["orientable"]) and s.counts["nodes"] for s in skeletons)
    assert any(s.counts["components"] > 1 for s in skeletons)
    assert any(s.corner_names for s in skeletons)
    assert any("vertices/point" in s and "vertices/corners" not in s for s in skeletons)
