"""Kernels: plain functions on flat arrays, the same source interpreted on small input, compiled on large.

A kernel takes flat (one-dimensional) arrays and integers, loops plainly, fills the arrays it is handed and
returns small integers.  It allocates nothing, never raises, calls no other kernel and knows no class.  Where
a number must be a constant for the compiler (the number of slots), it is handed as a tuple of that length.

An `Engine` runs kernels: interpreted on memory views (which index faster than arrays), or compiled by numba
in daemon threads, so that an interrupt reaches the main thread at once.  Kernels that take a range
``lo, hi`` as their last arguments can be split over threads; their results never depend on the split.
"""

from __future__ import annotations

import os
import sys
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import partial
from itertools import pairwise
from typing import Any

import numpy as np

from ..errors import InputError

__all__ = ["Engine", "engine", "mode", "random_factors", "thread_count"]

# Below this many simplices interpreting is quicker than importing numba and loading compiled kernels
# (about 0.5 s, against 0.08 ms a simplex).
COMPILE_FROM = 6000

_compiled: dict[Callable, Callable] = {}
_forced: list[str] = []


class Engine:
    """Runs kernels in one way: interpreted, or compiled with a number of threads.

    With `inline` compiled kernels run in the calling thread, which is quicker where there is little to do.
    """

    def __init__(self, compiled: bool, threads: int, inline: bool = False) -> None:
        self.compiled = compiled
        self.threads = threads if compiled else 1
        self.inline = inline or not compiled

    def __call__(self, kernel: Callable, *arguments: Any) -> Any:
        """Run one kernel as a whole."""
        return self.each(kernel, [arguments])[0]

    def prepare(self, kernel: Callable) -> None:
        """Import the compiler in this thread, before tasks that call the kernel begin."""
        if self.compiled:
            _compile(kernel)

    def here(self, kernel: Callable, *arguments: Any) -> Any:
        """Run one kernel in the calling thread (inside a task of `tasks`, say)."""
        if not self.compiled:
            return kernel(*map(_view, arguments))
        return _compile(kernel)(*arguments)

    def split(self, kernel: Callable, length: int, *arguments: Any) -> list[Any]:
        """Run a kernel on ranges that cover ``0 .. length - 1``; its results in the order of the ranges."""
        return self.each(kernel, [(*arguments, lo, hi) for lo, hi in self.ranges(length)])

    def each(self, kernel: Callable, calls: list[tuple]) -> list[Any]:
        """Run a kernel once for every tuple of arguments."""
        self.prepare(kernel)
        return self.tasks([partial(self.here, kernel, *call) for call in calls])

    def bucketed(self, length: int, buckets: int, count: tuple, fill: tuple) -> np.ndarray:
        """Sort things into buckets, in their order, by a kernel that counts and one that fills.

        `count` and `fill` are a kernel and its first arguments; each range of ``0 .. length - 1`` is handed
        to either with an array of its own: the sizes to add to, then the places to begin at.

        Returns
        -------
        ndarray of int64, shape (buckets + 1,)
            Where each bucket begins.
        """
        ranges = self.ranges(length)
        sizes = np.zeros((len(ranges), buckets), dtype=np.int64)
        self.each(count[0], [(*count[1:], sizes[r], *ends) for r, ends in enumerate(ranges)])
        start = np.zeros(buckets + 1, dtype=np.int64)
        np.cumsum(sizes.sum(axis=0), out=start[1:])
        # a range begins behind what the ranges before it put into the same bucket
        place = start[:-1].copy()
        for size in sizes:
            size[:], place = place, place + size
        self.each(fill[0], [(*fill[1:], sizes[r], *ends) for r, ends in enumerate(ranges)])
        return start

    def repeats(self, length: int, labels: int, axes: tuple[int, ...], mix: tuple) -> bool:
        """Whether two of `length` sets of labels have equal keys: surely so if two of the sets are equal.

        `mix` is a kernel of `kernels.repeats` that makes keys, and its first arguments; `labels` is how many
        labels a set has.  Different sets have equal keys only by accident, with odds of about 2**-60.
        """
        from .repeats import any_repeat, fill_keys

        shift = 62 - max(1, (length // 16).bit_length())
        key, entry = np.empty(length, dtype=np.int64), np.empty(length, dtype=np.int64)
        count = (*mix, random_factors(6 * labels), key, shift, axes)
        start = self.bucketed(length, 1 << (62 - shift), count, (fill_keys, key, entry, shift))
        return any(self.split(any_repeat, len(start) - 1, start, entry))

    def tasks(self, functions: list[Callable[[], Any]]) -> list[Any]:
        """Call the functions, at most `threads` at a time and begun in order; their results in order."""
        if self.inline:
            return [function() for function in functions]
        return _in_threads(functions, self.threads)

    def ranges(self, length: int, parts: int | None = None) -> list[tuple[int, int]]:
        """`parts` ranges (by default one for each thread) of almost equal length, fewer of a short one."""
        parts = max(1, min(parts or self.threads, length // 1024))
        return list(pairwise(length * part // parts for part in range(parts + 1)))


def engine(size: int, threads: int | None = None) -> Engine:
    """The engine for a complex of `size` simplices.

    Parameters
    ----------
    size : int
        Number of top simplices.
    threads : int, optional
        At most this many threads; by default what `thread_count` says.
    """
    if _forced:
        return Engine(_forced[-1] == "compiled", thread_count(threads))
    large = size >= COMPILE_FROM
    return Engine(large or bool(_compiled), thread_count(threads), inline=not large)


@contextmanager
def mode(kind: str) -> Iterator[None]:
    """Force ``"interpreted"`` or ``"compiled"`` kernels inside a ``with`` block (for tests and timings)."""
    if kind not in ("interpreted", "compiled"):
        raise ValueError(f"kernels are 'interpreted' or 'compiled', not {kind!r}")
    _forced.append(kind)
    try:
        yield
    finally:
        _forced.pop()


def random_factors(count: int) -> np.ndarray:
    """Odd numbers of 31 bits from the system's source of randomness, int64: no input can foresee them.

    What a kernel computes with them must not show in its result.
    """
    return np.frombuffer(os.urandom(4 * count), dtype=np.uint32).astype(np.int64) >> 1 | 1


def thread_count(threads: int | None = None) -> int:
    """Threads to use: the argument, else ``DUALIZE_THREADS``, else the cores this process may use.

    Raises
    ------
    InputError
        If the variable is set to something else than a number from 1 on.
    """
    if threads is None:
        text = os.environ.get("DUALIZE_THREADS", "")
        if text and not (text.isdecimal() and int(text) > 0):
            raise InputError(
                f"DUALIZE_THREADS is {text!r}, not a number of threads",
                hint="set it to 1 or more, or unset it",
            )
        threads = int(text) if text else len(os.sched_getaffinity(0))
    return max(1, threads)


def _view(argument: Any) -> Any:
    return memoryview(argument) if isinstance(argument, np.ndarray) else argument  # type: ignore[arg-type]


def _compile(kernel: Callable) -> Callable:
    if kernel not in _compiled:
        import numba

        made = numba.njit(nogil=True, cache=True)(kernel)
        if not _compiled and not _cached(made):
            print("dualize: compiling kernels for this machine (once, about half a minute)", file=sys.stderr)
        _compiled[kernel] = made
    return _compiled[kernel]


def _cached(dispatcher: Any) -> bool:
    """Whether an earlier run left compiled code of this kernel in the cache."""
    path = dispatcher.stats.cache_path
    name = dispatcher.py_func.__qualname__
    return bool(path) and os.path.isdir(path) and any(f".{name}-" in file for file in os.listdir(path))


def _in_threads(functions: list[Callable[[], Any]], threads: int) -> list[Any]:
    """Call the functions in daemon threads, so that an interrupt reaches the main thread at once."""
    results: list[Any] = [None] * len(functions)
    failures: list[BaseException] = []
    numbers = iter(range(len(functions)))
    lock = threading.Lock()

    def work() -> None:
        while not failures:
            with lock:
                number = next(numbers, None)
            if number is None:
                return
            try:
                results[number] = functions[number]()
            except BaseException as error:
                failures.append(error)

    workers = [threading.Thread(target=work, daemon=True) for _ in range(min(threads, len(functions)))]
    for worker in workers:
        worker.start()
    for worker in workers:
        worker.join()
    if failures:
        raise failures[0]
    return results
