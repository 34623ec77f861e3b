"""Boundary data: reading, refusing, and carrying to another description of the same boundary."""

import numpy as np
import pytest
import specimens as sp
from reference import glue_by_labels
from regions import SYMBOLS, admissible_spins, glued, loaded, scramble

import dualize
from dualize import InputError, make, spins
from dualize.match import match

SIMPLEX = dualize.build(make.simplex(4))


def test_an_integer_is_the_spin_of_all_links():
    assert spins.boundary_data(SIMPLEX, 2).spins.tolist() == [2] * 10


def test_links_are_named_by_labels_in_any_order():
    for n, labels in enumerate(SIMPLEX["links/corners"].tolist()):
        document = {"all": 2, "links": [{"corners": labels[::-1], "spin": 4}]}
        expected = [2] * 10
        expected[n] = 4
        assert spins.boundary_data(SIMPLEX, document).spins.tolist() == expected


def test_one_document_serves_both_sides_of_a_move():
    one, two = (dualize.build(make.move_side(4, 3, opposite=x)) for x in (False, True))
    document = spins.boundary_template(one, 1)
    document["nodes"][0] |= {"pairing": 1, "recoupling": 2}
    a, b = spins.boundary_data(one, document), spins.boundary_data(two, document)
    assert a.spins.tolist() == b.spins.tolist() == [1] * 18
    (n,), (m,) = a.states, b.states
    assert one["nodes/corners"][n].tolist() == two["nodes/corners"][m].tolist()
    np.testing.assert_allclose(a.states[n], b.states[m])


@pytest.mark.parametrize("pairing", range(3))
def test_states_of_a_pairing_are_that_of_the_coupled_tensor(pairing):
    """In pairing 0 the state of another pairing is a combination; the 3jm tensors of the reader say which."""
    order = spins.PAIRINGS[pairing]
    row = [1, 1, 1, 1]
    document = {"all": 1, "nodes": [{"node": 0, "pairing": pairing, "recoupling": 2}]}
    state = spins.boundary_data(SIMPLEX, document).states[0]
    tensor = SYMBOLS.intertwiners(*row)[1]  # recoupling spin 1
    tensor = np.moveaxis(tensor, range(4), order)
    expected = np.tensordot(SYMBOLS.intertwiners(*row), tensor, axes=4)
    np.testing.assert_allclose(state, expected, atol=1e-12)


def test_vectors_may_be_complex():
    document = {"all": 1, "nodes": [{"node": 2, "vector": [[0, 1], 0.5]}]}
    assert spins.boundary_data(SIMPLEX, document).states[2].tolist() == [1j, 0.5]


BAD = {
    "unknown entry": ({"all": 1, "colour": 3}, "no entry 'colour'"),
    "other format": ({"format": "other", "all": 1}, "the format is 'other'"),
    "other version": ({"version": 2, "all": 1}, "version 2 of boundary data is not known"),
    "no spins": ({}, "10 of 10 links have no spin"),
    "half": ({"all": 0.5}, "an integer from 0 on, not 0.5"),
    "true": ({"all": True}, "an integer from 0 on, not True"),
    "negative": ({"all": 1, "links": [{"link": 0, "spin": -1}]}, "not -1"),
    "null": ({"all": 1, "links": [{"link": 0, "spin": None}]}, "the spin is missing"),
    "no link": ({"all": 1, "links": [{"link": 10, "spin": 1}]}, "there is no link 10"),
    "no corners": ({"all": 1, "links": [{"corners": [7, 8, 9], "spin": 1}]}, "no link has the corners 7 8 9"),
    "unnamed": ({"all": 1, "links": [{"spin": 1}]}, "the link is not named"),
    "twice": ({"all": 1, "links": [{"link": 0, "spin": 1}] * 2}, "listed twice"),
    "no list": ({"all": 1, "links": {}}, "not a list of objects"),
    "recoupling": ({"all": 1, "nodes": [{"node": 0, "recoupling": 1}]}, "recoupling spin 1 is not possible"),
    "pairing": ({"all": 1, "nodes": [{"node": 0, "recoupling": 0, "pairing": 3}]}, "the pairing is 3"),
    "short vector": ({"all": 1, "nodes": [{"node": 0, "vector": [1]}]}, "1 entries, and there are 2"),
    "words": ({"all": 1, "nodes": [{"node": 0, "vector": ["a", 1]}]}, "no list of numbers"),
    "both": ({"all": 1, "nodes": [{"node": 0, "vector": [1, 0], "recoupling": 0}]}, "not both"),
}


@pytest.mark.parametrize("document, match", BAD.values(), ids=BAD)
def test_bad_documents_are_refused(document, match):
    with pytest.raises(InputError, match=match):
        spins.boundary_data(SIMPLEX, document)


def test_a_template_names_every_link_and_node():
    document = spins.boundary_template(dualize.build(make.move_side(4, 3)), 1)
    assert len(document["links"]) == 18 and len(document["nodes"]) == 9
    assert all("corners" in row for row in document["links"] + document["nodes"])


def test_a_template_without_labels_has_numbers():
    s = dualize.build(make.shared_pair(4))
    document = spins.boundary_template(s, 2)
    assert [row["link"] for row in document["links"]] == [0, 1, 2, 3]
    assert spins.boundary_data(s, document).spins.tolist() == [2] * 4


CARRIED = {
    "4d-simplex": glue_by_labels(sp.simplex(4)),
    "4d-chain": glue_by_labels(sp.chain(4, 2)),
    "4d-3-3": glue_by_labels(sp.move_side(4, 3)),
    "4d-twisted": sp.GLUED["4d-twisted-simplex"],
    "3d-2-3": glue_by_labels(sp.move_side(3, 3)),
    "4d-melon-3": sp.melon(4, 3),
}


@pytest.mark.parametrize("table", CARRIED.values(), ids=CARRIED)
def test_carried_data_give_the_same_amplitude(table):
    """An amplitude closed with random states does not change with the description of the region."""
    rng = np.random.default_rng(11)
    one = glued(table)
    sizes = []
    for _ in range(4):
        other, _, _ = scramble(table, rng)
        two = glued(other)
        (found,) = match(one, two, whole=True)
        given = admissible_spins(one, rng, largest=400)
        dims = spins.intertwiner_dimension(given[one["nodes/link"]]).tolist()
        states = {n: rng.normal(size=d) for n, d in enumerate(dims)}
        data = spins.BoundaryData(given, states)
        carried = data.carried(found, one, two)
        numbers = []
        for s, d in ((one, data), (two, carried)):
            value = SYMBOLS.amplitude(loaded(s, SYMBOLS), d.spins, up_to=2)
            for n in range(value.ndim - 1, -1, -1):
                value = np.tensordot(value, d.states[n], axes=(n, 0))
            numbers.append(d.sign * float(value))
        assert numbers[0] == pytest.approx(numbers[1], abs=1e-12)
        sizes.append(abs(numbers[0]))
    assert max(sizes) > 1e-4


def test_a_labelled_document_gives_equal_amplitudes_on_both_sides_of_a_move():
    """3-3 move of SU(2) BF theory: H. Ooguri, Mod. Phys. Lett. A 7 (1992) 2799."""
    one, two = (dualize.build(make.move_side(4, 3, opposite=x)) for x in (False, True))
    values = []
    for s in (one, two):
        document = spins.boundary_template(s, 1)
        for n, row in enumerate(sorted(document["nodes"], key=lambda row: row["corners"])):
            row["vector"] = [0.5 + n % 3, 1.5 - n % 2]
            del row["recoupling"], row["pairing"]
        data = spins.boundary_data(s, document)
        value = SYMBOLS.amplitude(loaded(s, SYMBOLS), data.spins)
        for n in range(value.ndim - 1, -1, -1):
            value = np.tensordot(value, data.states[n], axes=(n, 0))
        values.append(float(value))
    assert values[0] == pytest.approx(values[1], abs=1e-14)
    assert abs(values[0]) > 1e-3
