"""Facet text: one top simplex per line.

    # two tetrahedra
    0 1 2 3
    1, 2, 3, 4      # blanks or commas

Labels are integers (``[+-]?[0-9]+`` within 64 bits), or, if any label of the file is no integer, words; in a
file of words a token that reads as a number (``4.5``, ``1e3``, an integer beyond 64 bits) is refused, for it
is more likely a slip.  ``#`` begins a comment; empty lines, any line ends and a byte-order mark do not
matter.

The text holds labels only: coordinates, and gluings that labels do not determine, need another format.

A compiled kernel reads large files of integers; whatever it cannot read goes to the exact scanner, which
reads words, and says what is wrong and in which line.
"""

from __future__ import annotations

import re
from array import array
from collections.abc import Iterator
from io import BytesIO, TextIOWrapper
from itertools import pairwise

import numpy as np

from ..errors import InputError
from ..kernels import engine
from ..skeleton import Skeleton
from ..triangulation import Triangulation
from .registry import Content, Format, Options, dropping
from .scan import parse_rows
from .source import GZIP, Source
from .target import Target

__all__ = ["FORMAT", "check_words", "number_words", "parse", "reads_as_number"]

BOM = b"\xef\xbb\xbf"
LARGE = 1 << 17  # bytes from which the kernel reads
INTEGER = re.compile(r"[+-]?[0-9]+", re.ASCII)
BINARY = (GZIP, b"\x89HDF", b"\x93NUMPY", b"PK\x03\x04", b"PK\x05\x06", b"\xff\xfe", b"\xfe\xff")


def sniff(head: bytes) -> bool:
    """Anything without a zero byte, but for what another format would recognise."""
    plain = head.removeprefix(BOM).lstrip()
    return b"\0" not in head and not head.startswith(BINARY) and not plain.startswith((b"{", b"[", b"<"))


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read facet text."""
    labels, names = parse(source.take(), options.threads)
    kind = "integers" if names is None else "words"
    content = Triangulation.from_facets(labels, corner_names=names, threads=options.threads)
    return content, f"facet text, labels are {kind}"


def parse(data: bytes, threads: int | None = None) -> tuple[np.ndarray, tuple[str, ...] | None]:
    """Labels of facet text.

    Parameters
    ----------
    data : bytes
    threads : int, optional

    Returns
    -------
    labels : ndarray of int64, shape (N, D + 1)
    names : tuple of str or None
        The words in order of code points, where labels are words; `labels` are positions in it.

    Raises
    ------
    InputError
        With the line.

    Notes
    -----
    Takes time in proportion to the text (words: n log n of the different ones).  Beside the text and the
    labels it needs little room.
    """
    if len(data) >= LARGE and (labels := parse_integers(data, threads)) is not None:
        return labels, None
    return scan(data)


def parse_integers(data: bytes, threads: int | None = None) -> np.ndarray | None:
    """Labels of a faultless file of integers, else None."""
    width = _first_width(data)
    if width is None:
        return None
    text = np.frombuffer(data, dtype=np.uint8)
    start = len(BOM) if data.startswith(BOM) else 0
    run = engine(len(data) // 10, threads)
    parts = run.threads if run.compiled else 1
    ends = [_line_start(data, start + (len(data) - start) * p // parts) for p in range(1, parts)]
    cuts = [start, *ends, len(data)]
    ranges = list(pairwise(cuts))
    room = [data.count(b"\n", lo, hi) + data.count(b"\r", lo, hi) + 1 for lo, hi in ranges]
    out = np.empty(sum(room) * width, dtype=np.int64)  # untouched where there are comments and empty lines
    begin = [sum(room[:p]) * width for p in range(len(room))]
    calls = [(text, out, width, first, lo, hi) for first, (lo, hi) in zip(begin, ranges, strict=True)]
    rows = run.each(parse_rows, calls)
    if min(rows) < 0:
        return None
    end = 0
    for first, count in zip(begin, rows, strict=True):
        if first != end:  # close the gap that comments and empty lines left
            out[end : end + count * width] = out[first : first + count * width]
        end += count * width
    return out[:end].reshape(-1, width) if end else None


def _first_width(data: bytes) -> int | None:
    """Number of labels in the first line that has some, None if it is not near or no line of a simplex."""
    for line in re.split(rb"[\r\n]+", data[: 1 << 16])[:-1]:
        tokens = line.partition(b"#")[0].replace(b",", b" ").split()
        if tokens:
            return len(tokens) if len(tokens) in (3, 4, 5) else None
    return None


def _line_start(data: bytes, at: int) -> int:
    """Where the first line after `at` begins."""
    end = data.find(b"\n", at)
    if end < 0:
        end = data.find(b"\r", at)
    return len(data) if end < 0 else end + 1


# -- the exact scanner -----------------------------------------------------------------------------


def scan(data: bytes) -> tuple[np.ndarray, tuple[str, ...] | None]:
    """Labels of any facet text, or the error that says what is wrong in which line."""
    index: dict[str, int] = {}
    numbers = array("q")
    width = first = 0
    for line, tokens in _lines(data):
        if len(tokens) != width:
            if width:
                raise InputError(
                    f"there are {len(tokens)} labels in this line and {width} in line {first}",
                    f"line {line}: {_show(tokens)}",
                    "every simplex of one triangulation has the same number of labels; is the file whole?",
                )
            width, first = len(tokens), line
            if width not in (3, 4, 5):
                raise InputError(
                    f"a line of {width} label{'s' if width != 1 else ''}",
                    f"line {line}: {_show(tokens)}",
                    "a line holds the 3, 4 or 5 labels of a triangle, tetrahedron or 4-simplex",
                )
        numbers.extend([index.setdefault(token, len(index)) for token in tokens])
    if not width:
        raise InputError(
            "there is no simplex in the file", hint="write the labels of one simplex in each line"
        )
    rows = np.frombuffer(numbers, dtype=np.int64).reshape(-1, width)
    names: tuple[str, ...] | None = None
    if all(map(INTEGER.fullmatch, index)):
        values = [_integer(token) for token in index]
        if None in values:
            raise _number_refused(data, list(index)[values.index(None)])
        labels = np.array(values, dtype=np.int64)[rows]
    else:
        for token in index:
            if reads_as_number(token) and _integer(token) is None:
                raise _number_refused(data, token)
            if any(ord(c) < 32 or 127 <= ord(c) < 160 for c in token):
                raise InputError(
                    "a label holds a control character",
                    f"line {_line_of(data, token)}: {_show([token])}",
                    "is this a text file?",
                )
        _check_header(data, rows, index)
        labels, names = _in_order(rows, list(index))
    _check_repeats(data, labels)
    return labels, names


def number_words(tokens: list[str], width: int) -> tuple[np.ndarray, tuple[str, ...]]:
    """Words as positions in their sorted list: int64, shape (N, width), and the list."""
    index: dict[str, int] = {}
    rows = np.array([index.setdefault(token, len(index)) for token in tokens], dtype=np.int64)
    return _in_order(rows.reshape(-1, width), list(index))


def check_words(words: list[str] | tuple[str, ...], where: str) -> None:
    """Refuse what can be no label: an empty word, or one with a control character."""
    for word in words:
        if not word or any(ord(c) < 32 or 127 <= ord(c) < 160 for c in word):
            what = "a label holds a control character" if word else "a label is empty"
            raise InputError(what, f"{where}: {word!r}", "labels are integers or printable words")


def _in_order(rows: np.ndarray, words: list[str]) -> tuple[np.ndarray, tuple[str, ...]]:
    order = sorted(range(len(words)), key=words.__getitem__)
    place = np.empty(len(words), dtype=np.int64)
    place[order] = np.arange(len(words))
    return place[rows], tuple(words[i] for i in order)


def _lines(data: bytes) -> Iterator[tuple[int, list[str]]]:
    """Number and labels of every line that has some."""
    line = 0
    try:
        for line, content in enumerate(TextIOWrapper(BytesIO(data), encoding="utf-8-sig"), 1):
            text = content.partition("#")[0] if "#" in content else content
            if "," in text:
                fields = text.split(",")
                if any(not field.strip() for field in fields):
                    raise InputError(
                        "there is no label between two commas, or beside one",
                        f"line {line}: {_show([content.strip()])}",
                        "write the label, or take the comma away",
                    )
                text = " ".join(fields)
            if tokens := text.split():
                yield line, tokens
    except UnicodeDecodeError:
        try:
            data.decode("utf-8-sig")
        except UnicodeDecodeError as error:
            line = len(re.findall(rb"\r\n|\r|\n", data[: error.start])) + 1
        raise InputError(
            "this is no UTF-8 text", f"line {line}", "save it as UTF-8, or name its format"
        ) from None


def _integer(token: str) -> int | None:
    """The value of an integer within 64 bits, else None."""
    if not INTEGER.fullmatch(token):
        return None
    digits = token.lstrip("+-").lstrip("0") or "0"
    if len(digits) > 19:
        return None
    value = -int(digits) if token[0] == "-" else int(digits)
    return value if -(2**63) <= value < 2**63 else None


def reads_as_number(token: str) -> bool:
    """Whether a word looks like a number: ``4.5``, ``1e3``, ``nan``."""
    try:
        float(token)
    except ValueError:
        return False
    return True


def _number_refused(data: bytes, token: str) -> InputError:
    where = f"line {_line_of(data, token)}: {_show([token])}"
    if INTEGER.fullmatch(token):
        hint = (
            "labels lie between -2**63 and 2**63 - 1; number them anew, or write them as words (v1, v2, ...)"
        )
        return InputError("a label is beyond 64 bits", where, hint)
    hint = (
        "labels are integers, or words that do not read as numbers; coordinates go into JSON or a mesh format"
    )
    return InputError("a label is a number but no integer", where, hint)


def _line_of(data: bytes, token: str) -> int:
    return next(line for line, tokens in _lines(data) if token in tokens)


def _check_header(data: bytes, rows: np.ndarray, index: dict[str, int]) -> None:
    """Refuse a file of integers whose first line alone holds words: column names, most likely."""
    is_word = np.array([not INTEGER.fullmatch(token) for token in index])[rows]
    if len(rows) > 1 and is_word[0].all() and not is_word[1:].any():
        line, tokens = next(_lines(data))
        raise InputError(
            "the first line holds words, all others integers",
            f"line {line}: {_show(tokens)}",
            "if these are column names put # before them",
        )


def _check_repeats(data: bytes, labels: np.ndarray) -> None:
    ordered = np.sort(labels, axis=1)
    same = (ordered[:, 1:] == ordered[:, :-1]).any(axis=1)
    if not same.any():
        return
    row = int(np.argmax(same))
    line, tokens = next(entry for number, entry in enumerate(_lines(data)) if number == row)
    values = labels[row].tolist()
    twice = next(token for i, token in enumerate(tokens) if values[i] in values[:i])
    raise InputError(
        f"label {twice} is repeated in a simplex",
        f"line {line}: {_show(tokens)}",
        f"the {len(tokens)} corners of a simplex need {len(tokens)} different labels",
    )


def _show(tokens: list[str]) -> str:
    """Tokens of a line for an error, cut short and without control characters."""
    text = " ".join(tokens[:8]) + (" ..." if len(tokens) > 8 else "")
    text = text if text.isprintable() else repr(text)[1:-1]
    return text if len(text) <= 80 else text[:77] + "..."


# -- writing ---------------------------------------------------------------------------------------


def write(content: Content, target: Target) -> None:
    """Write facet text; with commas where the suffix is ``.csv``."""
    for piece in text_pieces(content, b"," if target.suffix == ".csv" else b" "):
        target.stream.write(piece)


def text_pieces(content: Content, separator: bytes) -> Iterator[bytes]:
    """Facet text in pieces."""
    if isinstance(content, Skeleton):
        raise InputError("facet text holds triangulations, not skeletons", hint="write .json, .h5 or .npz")
    if not content.matched or content.corners is None:
        raise InputError(
            "this triangulation is a gluing table, which labels alone do not determine",
            hint="write it as .json, .h5 or .npz",
        )
    if content.corner_names is not None:
        yield _words_text(content, content.corner_names, separator)
        return
    import orjson

    for lo in range(0, len(content), 1 << 16):
        rows = as_written(content, lo, lo + (1 << 16))
        block = orjson.dumps(rows, option=orjson.OPT_SERIALIZE_NUMPY)
        yield block[2:-2].replace(b"],[", b"\n").replace(b",", separator) + b"\n"


def as_written(t: Triangulation, lo: int = 0, hi: int | None = None) -> np.ndarray:
    """Labels in an order whose parity is `written`: int64, shape (rows, D + 1)."""
    assert t.corners is not None
    rows = t.corners[lo:hi].copy()
    turned = t.written[lo:hi] < 0
    rows[turned, -2:] = rows[turned, -2:][:, ::-1]
    return rows


def _words_text(t: Triangulation, names: tuple[str, ...], separator: bytes) -> bytes:
    labels = as_written(t)
    words = np.asarray(names, dtype=object)[labels].tolist()
    blank = separator.decode()
    text = "".join(blank.join(row) + "\n" for row in words).encode("utf-8", "replace")
    used = np.unique(labels)
    try:
        again, read_names = scan(text)
        faithful = read_names == tuple(names[i] for i in used.tolist()) and np.array_equal(
            used[again] if again.shape == labels.shape else again, labels
        )
    except InputError:
        faithful = False
    if not faithful or not sniff(text[:4096]):
        raise InputError(
            "a label holds a blank, a comma or #, or reads as a number, and would not come back from text",
            hint="write it as .json",
        )
    return text


FORMAT = Format(
    name="text",
    suffixes=(".txt", ".csv", ".tsv", ".facets"),
    holds="a triangulation as lines of labels",
    sniff=sniff,
    read=read,
    write=write,
    packed=True,
    drops=dropping("the coordinates"),
)
