"""Facet text: what is read, and what is refused with its line."""

import numpy as np
import pytest
import specimens as sp
from hypothesis import given
from hypothesis import strategies as st

from dualize import Triangulation
from dualize.errors import InputError
from dualize.formats import decode, encode, scan
from dualize.formats import text as facet_text
from dualize.kernels import mode

both_kernels = pytest.mark.parametrize("kernels", ["interpreted", "compiled"])
PLAIN = [[0, 1, 2, 3], [1, 2, 3, 4]]


def labels(text):
    data = text if isinstance(text, bytes) else text.encode()
    rows, names = facet_text.parse(data)
    return rows.tolist() if names is None else np.asarray(names, dtype=object)[rows].tolist()


# --------------------------------------------------------------------------------------------------
# Read

READ = {
    "blanks": "0 1 2 3\n1 2 3 4\n",
    "tabs": "0\t1\t2\t3\n1\t2\t3\t4\n",
    "commas": "0,1,2,3\n1,2,3,4\n",
    "commas-and-blanks": "0, 1 ,2 , 3\n1 2, 3 4\n",
    "no-last-line-end": "0 1 2 3\n1 2 3 4",
    "carriage-returns": "0 1 2 3\r1 2 3 4\r",
    "both-line-ends": "0 1 2 3\r\n1 2 3 4\r\n",
    "empty-lines": "\n\n0 1 2 3\n   \n\t\n1 2 3 4\n\n",
    "comments": "# head\n0 1 2 3 # tail\n   # inside\n1 2 3 4#\n#",
    "comment-with-a-word": "0 1 2 3 # 4.5, x\n1 2 3 4\n",
    "blanks-at-both-ends": "  0 1 2 3  \n\t1 2 3 4\t\n",
    "signs-and-zeros": "+0 001 2 +3\n1 2 3 00000000000000000000000000004\n",
    "byte-order-mark": b"\xef\xbb\xbf0 1 2 3\n1 2 3 4\n",
}


@pytest.mark.parametrize("text", READ.values(), ids=READ.keys())
def test_scanner_reads(text):
    assert labels(text) == PLAIN


@both_kernels
@pytest.mark.parametrize("text", READ.values(), ids=READ.keys())
def test_kernel_reads(text, kernels):
    data = text if isinstance(text, bytes) else text.encode()
    if data.endswith(b"4"):
        data += b"\n"
    with mode(kernels):
        rows = facet_text.parse_integers(data)
    assert rows is not None
    assert rows.tolist() == PLAIN


@pytest.mark.parametrize("line", ["0 1 2", "0 1 2 3", "0 1 2 3 4"], ids=["2D", "3D", "4D"])
def test_three_to_five_labels_a_line(line):
    assert labels(line) == [[int(x) for x in line.split()]]


def test_both_ends_of_64_bits_are_read():
    assert labels("-9223372036854775808 0 9223372036854775807") == [[-(2**63), 0, 2**63 - 1]]


WORDS = {
    "letters": ("a b c\nb c d\n", [["a", "b", "c"], ["b", "c", "d"]]),
    "a-word-among-integers": ("0 1 2\n1 2 x\n", [["0", "1", "2"], ["1", "2", "x"]]),
    "beyond-ascii": ("é ß Ω\n", [["é", "ß", "Ω"]]),
    "hexadecimal": ("0x1 0x2 0x3\n", [["0x1", "0x2", "0x3"]]),
    "sign-alone": ("+ - x\n", [["+", "-", "x"]]),
    "version-numbers": ("1.2.3 v2 x\n", [["1.2.3", "v2", "x"]]),
}


@pytest.mark.parametrize(("text", "rows"), WORDS.values(), ids=WORDS.keys())
def test_words(text, rows):
    assert labels(text) == rows


def test_words_are_numbered_by_code_points():
    _, names = facet_text.parse("b a Z\nz a é\n".encode())
    assert names == ("Z", "a", "b", "z", "é")


@given(
    st.integers(3, 5).flatmap(
        lambda k: st.lists(
            st.lists(st.integers(-(2**63), 2**63 - 1), min_size=k, max_size=k, unique=True),
            min_size=1,
            max_size=8,
        )
    ),
    st.sampled_from([" ", ",", " , ", "\t", "  "]),
    st.sampled_from(["\n", "\r\n", "\r", "\n\n", " # c\n"]),
)
def test_kernel_and_scanner_read_what_was_written(rows, separator, end):
    data = "".join(separator.join(map(str, row)) + end for row in rows).encode()
    assert labels(data) == rows
    with mode("interpreted"):
        fast = facet_text.parse_integers(data)
    if any(x == -(2**63) for row in rows for x in row):
        assert fast is None  # left to the scanner
    else:
        assert fast.tolist() == rows


@given(st.text(alphabet="01 ,\n\r#-+9a.", max_size=60))
def test_kernel_never_reads_what_the_scanner_reads_otherwise(text):
    data = b"7 8 9\n" + text.encode() + b"\n"
    with mode("interpreted"):
        fast = facet_text.parse_integers(data)
    if fast is not None:
        assert facet_text.scan(data)[1] is None
        assert fast.tolist() == facet_text.scan(data)[0].tolist()


@pytest.mark.parametrize("threads", [1, 2, 3])
@pytest.mark.parametrize("filling", ["", "# note\n", "\n\n"], ids=["plain", "comments", "empty-lines"])
def test_large_text_is_read_alike_by_any_number_of_threads(threads, filling):
    rows = np.arange(5 * 20_000).reshape(-1, 5)
    text = "".join(" ".join(map(str, row)) + "\n" + filling * (row[0] % 3 == 0) for row in rows.tolist())
    assert len(text) > facet_text.LARGE
    assert np.array_equal(facet_text.parse_integers(text.encode(), threads), rows)


def test_numpy_reads_the_same_numbers():
    """numpy.loadtxt, numpy documentation, as the independent reader."""
    from io import BytesIO

    data = encode(Triangulation.from_facets(sp.shuffled(sp.kuhn_grid((3, 3, 3)), seed=1)), "text")
    assert np.array_equal(facet_text.parse(data)[0], np.loadtxt(BytesIO(data), dtype=np.int64))


# --------------------------------------------------------------------------------------------------
# Refused

REFUSED = {
    "decimal-among-integers": ("0 1 2 3\n1 2 3 4.5\n", "a number but no integer", "line 2: 4.5"),
    "exponent-among-integers": ("0 1 2 3\n\n1 2 1e3 4\n", "a number but no integer", "line 3: 1e3"),
    "nan": ("0 1 2 nan\n", "a number but no integer", "line 1: nan"),
    "number-among-words": ("a b c\n# x\nb c 0.5", "a number but no integer", "line 3: 0.5"),
    "overflow": ("0 1 2 3\n1 2 3 9223372036854775808\n", "beyond 64 bits", "line 2: 9223372036854775808"),
    "underflow": ("0 1 2 -9223372036854775809\n", "beyond 64 bits", "line 1: -9223372036854775809"),
    "overflow-of-5000-digits": ("0 1 2 " + "9" * 5000, "beyond 64 bits", "line 1: 999"),
    "overflow-among-words": ("a b c\nb c 99999999999999999999\n", "beyond 64 bits", "line 2: 9999"),
    "repeated-label": ("0 1 2 3\n\n# x\n1 2 3 1\n", "label 1 is repeated in a simplex", "line 4: 1 2 3 1"),
    "repeated-word": ("a b c d\nb a c b\n", "label b is repeated in a simplex", "line 2: b a c b"),
    "repeated-in-two-spellings": ("0 1 2 +1\n", r"label \+1 is repeated", "line 1: 0 1 2 +1"),
    "short-row": (
        "# a\n0 1 2 3\n1 2 3\n",
        "there are 3 labels in this line and 4 in line 2",
        "line 3: 1 2 3",
    ),
    "long-row": ("0 1 2 3\n1 2 3 4 5\n", "there are 5 labels in this line and 4 in line 1", "line 2"),
    "cut-in-the-middle": ("0 1 2 3\n1 2 3 4\n2 3", "there are 2 labels", "line 3: 2 3"),
    "one-label": ("5\n6\n", "a line of 1 label", "line 1: 5"),
    "six-labels": ("0 1 2 3 4 5\n", "a line of 6 labels", "line 1"),
    "only-comments": ("# nothing\n\n # here\n", "there is no simplex in the file", None),
    "two-commas": ("0 1 2 3\n0,1,,3\n", "no label between two commas", "line 2: 0,1,,3"),
    "comma-at-the-end": ("0,1,2,\n", "no label between two commas, or beside one", "line 1"),
    "comma-at-the-start": (",0,1,2\n", "no label between two commas, or beside one", "line 1"),
    "column-names": (
        "a,b,c,d\n0,1,2,3\n1,2,3,4\n",
        "the first line holds words, all others integers",
        "line 1",
    ),
    "control-character": ("a b c\x07 d\n", "a control character", r"line 1: c\x07"),
    "not-utf-8": (b"a b c\n\xff b c\n", "this is no UTF-8 text", "line 2"),
}


@pytest.mark.parametrize(("text", "what", "where"), REFUSED.values(), ids=REFUSED.keys())
def test_refused_with_its_line(text, what, where):
    with pytest.raises(InputError, match=what) as caught:
        labels(text)
    assert (where is None) == (caught.value.where is None)
    assert where is None or caught.value.where.startswith(where)
    assert caught.value.hint


@pytest.mark.parametrize(
    ("last", "what"),
    [
        ("1 2 3 4.5", "no integer"),
        ("1 2 3", "3 labels"),
        ("7 8 7 9", "repeated"),
        ("1 2 3 9" + "9" * 19, "64 bits"),
    ],
    ids=["decimal", "short", "repeated", "overflow"],
)
def test_error_at_the_end_of_a_large_file_has_its_line(last, what):
    body = "".join(f"{i} {i + 1} {i + 2} {i + 3}\n" for i in range(20_000))
    assert len(body) > facet_text.LARGE
    with pytest.raises(InputError, match=what) as caught:
        facet_text.parse(f"{body}{last}\n".encode())
    assert caught.value.where.startswith("line 20001: ")


@pytest.mark.parametrize(
    "words",
    [
        ["a b", "c", "d"],
        ["a,b", "c", "d"],
        ["a#", "c", "d"],
        ["1.5", "c", "d"],
        ["1", "2", "3"],
        ["[1", "c", "d"],
    ],
    ids=["blank", "comma", "hash", "number", "all-integers", "bracket"],
)
def test_words_that_would_not_come_back_are_not_written(words):
    with pytest.raises(InputError, match="would not come back from text"):
        encode(Triangulation.from_facets([words]), "text")


def test_a_gluing_table_is_not_written_as_text():
    t = Triangulation.from_gluings([[0, 0, -1]], [[[1, 0, 2], [1, 0, 2], [-1, -1, -1]]])
    with pytest.raises(InputError, match="this triangulation is a gluing table"):
        encode(t, "text")


def test_text_of_another_kind_is_not_read_as_facets():
    with pytest.raises(InputError, match=r"this is no text file: it looks like json"):
        decode(b"[[0, 1, 2, 3]]", "text")


def test_kernel_contract():
    """A kernel returns -1 at what it cannot read, and reads no byte beyond its range."""
    text = np.frombuffer(b"0 1 2\n3 4 5\nxxxx", dtype=np.uint8)
    out = np.full(12, -7, dtype=np.int64)
    assert scan.parse_rows(text, out, 3, 0, 0, 12) == 2
    assert out.tolist() == [0, 1, 2, 3, 4, 5] + [-7] * 6
    assert scan.parse_rows(text, out, 3, 0, 0, 16) == -1
