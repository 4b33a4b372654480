"""Draws that can be found again by name, in Latin hypercube blocks.

One stream belongs to one triple (seed, name, block).  Its key is a BLAKE2b hash
of the three, its numbers are the raw 64-bit output of the counter generator
Philox-4x64-10 ([1]_).  Nothing else of numpy's generators is used, so the numbers
do not depend on the version of a library, and adding, dropping or reordering
inputs leaves every other input's draws as they were.

Within a block each stream is stratified ([2]_): the order of the raw numbers is
the permutation of the strata, lower bits of the same numbers are the place within
the stratum.  ``docs/method.md``, section "Streams", describes this completely
enough to write it again in another language.

References
----------
.. [1] Salmon, J. K., Moraes, M. A., Dror, R. O. and Shaw, D. E. (2011). Parallel
   random numbers: as easy as 1, 2, 3. SC '11. doi:10.1145/2063384.2063405
.. [2] McKay, M. D., Beckman, R. J. and Conover, W. J. (1979). A comparison of three
   methods for selecting values of input variables in the analysis of output from
   a computer code. Technometrics 21(2), 239-245. doi:10.2307/1268522
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from hashlib import blake2b
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

if TYPE_CHECKING:
    from collections.abc import Sequence

Array = NDArray[np.float64]
Words = NDArray[np.uint64]
Order = NDArray[np.int64]

BLOCK = 4096
"""Trials in one Latin hypercube; a constant of the method."""

_INDEX_BITS = 12
_INDEX_MASK = np.uint64(BLOCK - 1)
_KEEP_MASK = np.uint64(2**64 - BLOCK)
_ONE_AS_BITS = np.uint64(0x3FF0000000000000)
_DROP = np.uint64(24)
_TO_MANTISSA = np.uint64(12)

_TRIALS = np.arange(BLOCK, dtype=np.uint64)

_EXACT_TAIL = 32
"""Strata at either end whose scores come from the inverse normal itself."""


def stream_key(seed: int, name: str, block: int) -> Words:
    """Return the (2,) Philox key of one stream."""
    text = f"contingency-draws/1|{seed}|{block}|{name}"
    digest = blake2b(text.encode("utf-8"), digest_size=16).digest()
    return np.frombuffer(digest, dtype="<u8").astype(np.uint64)


class Source:
    """A Philox generator that is set to one stream after another.

    Setting the state of one generator takes a quarter of the time of making a new
    one.  Not shared between threads.
    """

    def __init__(self, seed: int) -> None:
        self._seed = seed
        # numpy's stubs know no key without a seed; the state is set before use.
        self._generator = np.random.Philox(0)
        self._state: Any = dict(self._generator.state)
        self._state["buffer_pos"] = 4
        self._state["has_uint32"] = 0
        self._state["uinteger"] = 0

    def raw(self, name: str, block: int) -> Words:
        """Return the first 4,096 raw numbers of a stream, (n,) of 64-bit words."""
        self._state["state"] = {
            "counter": np.zeros(4, dtype=np.uint64),
            "key": stream_key(self._seed, name, block),
        }
        self._generator.state = self._state
        return self._generator.random_raw(BLOCK)


@dataclass(frozen=True, kw_only=True, slots=True)
class Strata:
    """The Latin hypercube cells of some streams in one block.

    Axes: ``k`` streams, ``n`` = 4,096 strata in rising order.
    """

    trial: Order
    """(k, n) the trial that each stratum belongs to."""
    place: Array
    """(k, n) one plus the place within the stratum, in [1, 2)."""


def strata(source: Source, names: Sequence[str], block: int) -> Strata:
    """Return the strata of the named streams in one block."""
    words = np.empty((len(names), BLOCK), dtype=np.uint64)
    for row, name in enumerate(names):
        np.bitwise_and(source.raw(name, block), _KEEP_MASK, out=words[row])
    return _strata_of(words)


def _strata_of(words: Words) -> Strata:
    """Order the words of each row, low twelve bits cleared; `words` is workspace."""
    # The low twelve bits make room for the trial's number: one sort of whole words
    # then yields the permutation, two to four times as fast as an index sort.
    np.bitwise_or(words, _TRIALS, out=words)
    words.sort(axis=1)
    trial = (words & _INDEX_MASK).view(np.int64)
    # The upper 24 bits know the rank; the next 28 do not, to better than 1e-7.
    np.left_shift(words, _DROP, out=words)
    np.right_shift(words, _TO_MANTISSA, out=words)
    np.bitwise_or(words, _ONE_AS_BITS, out=words)
    return Strata(trial=trial, place=words.view(np.float64))


@cache
def _score_polynomial() -> tuple[Array, Array, Array]:
    """Return coefficients (n,) of a parabola in `place` for each stratum.

    Through the inverse normal at the three Chebyshev nodes of the stratum.  Off by
    less than 2e-7 outside the exact tails (held by a test).
    """
    nodes = np.cos(np.pi * (2 * np.arange(3) + 1) / 6) / 2 + 1.5
    edges = np.arange(BLOCK)[:, None]
    values = ndtri((edges + nodes - 1.0) / BLOCK)  # (n, 3)
    parabola = np.linalg.solve(np.vander(nodes, 3), values.T)  # (3, n)
    second, first, constant = (np.ascontiguousarray(row) for row in parabola)
    return second, first, constant


def scores(cells: Strata, out: Array | None = None) -> Array:
    """Return (k, n) stratified standard normal scores in trial order.

    Stratum i of 4,096 holds the score ``ndtri((i + place - 1) / 4096)``.
    """
    second, first, constant = _score_polynomial()
    place = cells.place
    value = place * second
    value += first
    value *= place
    value += constant
    for part, start in (
        (slice(None, _EXACT_TAIL), 0),
        (slice(-_EXACT_TAIL, None), BLOCK - _EXACT_TAIL),
    ):
        index = np.arange(start, start + _EXACT_TAIL)
        value[:, part] = _tail_score(index, place[:, part])
    if out is None:
        out = np.empty_like(value)
    for to, trial, score in zip(out, cells.trial, value, strict=True):
        to[trial] = score
    return out


def _tail_score(index: NDArray[np.int64], place: Array) -> Array:
    """Return exact scores of strata near either end, upper ones by symmetry."""
    if index[0] == 0:
        return np.asarray(ndtri(_inside((index + (place - 1.0)) / BLOCK)))
    above = (BLOCK - index - (place - 1.0)) / BLOCK
    return np.asarray(-ndtri(_inside(above)))


def _inside(p: Array) -> Array:
    """Keep a chance off nought: the smallest step of `place` is 2**-40."""
    return np.maximum(p, 2.0**-54)


def uniforms(cells: Strata) -> Array:
    """Return (k, n) stratified uniforms in [0, 1), in the order of the strata."""
    return (np.arange(BLOCK) + (cells.place - 1.0)) / BLOCK


def plain_uniforms(words: Words) -> Array:
    """Return unstratified uniforms in (0, 1) from the upper 52 bits of raw words."""
    return ((words >> np.uint64(12)).astype(np.float64) + 0.5) * 2.0**-52
