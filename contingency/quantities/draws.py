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

_TRIALS = np.arange(BLOCK, dtype=np.uint64)
_INDEX_MASK = np.uint64(BLOCK - 1)
_KEEP_MASK = np.uint64(2**64 - BLOCK)
_OFFSET_MASK = np.uint64(2**40 - 1)
_ONE_AS_BITS = np.uint64(0x3FF0000000000000)

_EXACT = 32
"""Strata at either end whose scores come from the inverse normal itself."""
_CURVED = 512
"""Strata at either end, beyond the exact ones, that take a parabola; the others take
a straight line."""


def stream_key(seed: int, name: str, block: int) -> Words:
    """Return the (2,) Philox key of one stream."""
    text = f"contingency-draws/1|{seed}|{block}|{name}"
    digest = blake2b(text.encode("utf-8"), digest_size=16).digest()
    return np.frombuffer(digest, dtype="<u8")


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
        # The generator copies what it is given, so these two are filled anew each time.
        self._key = np.zeros(2, dtype=np.uint64)
        self._state["state"] = {
            "counter": np.zeros(4, dtype=np.uint64),
            "key": self._key,
        }

    def raw(self, name: str, block: int) -> Words:
        """Return the first 4,096 raw numbers of a stream, (n,) of 64-bit words."""
        self._key[:] = stream_key(self._seed, name, block)
        self._generator.state = self._state
        return self._generator.random_raw(BLOCK)


@dataclass(frozen=True, kw_only=True, slots=True)
class Strata:
    """The Latin hypercube cells of some streams in one block.

    Axes: ``k`` streams, ``n`` = 4,096 strata in rising order.
    """

    trial: Order
    """(k, n) the trial that each stratum belongs to."""
    offset: Array
    """(k, n) one plus the distance of the uniform from the stratum's lower end, in
    [1, 1 + 1/4096)."""


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
    # The upper 24 bits know the rank; the next 28 do not, to better than 1e-7.  As the
    # lowest bits of a float next to one they are the offset, and nothing is converted.
    np.bitwise_and(words, _OFFSET_MASK, out=words)
    np.bitwise_or(words, _ONE_AS_BITS, out=words)
    return Strata(trial=trial, offset=words.view(np.float64))


@cache
def _score_polynomial() -> tuple[Array, Array, Array]:
    """Return coefficients (n,) of a parabola in `offset` for each stratum.

    Through the inverse normal at the Chebyshev nodes of the stratum: three for the
    curved strata, two (and no square) for the others.  Off by less than 2e-7 outside
    the exact tails (held by a test).
    """
    lower = np.arange(BLOCK)
    second, first, constant = parabolas(lower / BLOCK, 1.0 / BLOCK)
    middle = slice(_CURVED, BLOCK - _CURVED)
    nodes = np.array([-1.0, 1.0]) * np.sqrt(0.125) + 0.5
    below, above = ndtri((lower[middle] + nodes[:, None]) / BLOCK)
    second[middle] = 0.0
    first[middle] = (above - below) / (nodes[1] - nodes[0]) * BLOCK
    constant[middle] = below - first[middle] * (1.0 + nodes[0] / BLOCK)
    return second, first, constant


def parabolas(lower: Array, width: Array | float) -> tuple[Array, Array, Array]:
    """Return parabolas in `offset` for normal scores of slices of a uniform.

    Parameters
    ----------
    lower : (m,) array
        Chance at the lower end of each slice; the ends stay inside 0 to 1.
    width : float or (m,) array
        Chance that one stratum, 1/4096 of the stream's uniform, stands for.

    Returns
    -------
    second, first, constant : (m,) arrays
        ``(second * offset + first) * offset + constant`` is the normal score.
    """
    nodes = np.cos(np.pi * (2 * np.arange(3) + 1) / 6) / 2 + 0.5
    values = ndtri(lower + width * nodes[:, None])  # (3, m)
    square, slope, level = np.linalg.solve(np.vander(nodes, 3), values)
    # From the place in the stratum, 0 to 1, to offset = 1 + place / 4096.
    second = square * BLOCK**2
    first = slope * BLOCK - 2.0 * second
    constant = level - slope * BLOCK + second
    return second, first, constant


def scores(cells: Strata, out: Array | None = None, scale: float = 1.0) -> Array:
    """Return (k, n) stratified normal scores, times `scale`, in trial order.

    Stratum i of 4,096 holds the score ``ndtri(i / 4096 + offset - 1)``.
    """
    second, first, constant = (scale * c for c in _score_polynomial())
    offset = cells.offset
    value = offset * first
    value += constant
    for curved in (slice(None, _CURVED), slice(-_CURVED, None)):
        near = offset[:, curved]
        value[:, curved] += second[curved] * near * near
    for tail in (slice(None, _EXACT), slice(-_EXACT, None)):
        value[:, tail] = scale * _tail_scores(offset[:, tail], lower=tail.stop)
    if out is None:
        out = np.empty_like(value)
    # One assignment for all rows: a short one would hold the interpreter's lock.
    start = np.arange(0, value.size, BLOCK)[:, None]
    out.reshape(-1)[cells.trial + start] = value
    return out


def _tail_scores(offset: Array, *, lower: int | None) -> Array:
    """Return exact scores of the outermost strata, upper ones by symmetry."""
    if lower:
        at = np.arange(_EXACT) / BLOCK + (offset - 1.0)
        return np.asarray(ndtri(_inside(at)))
    above = np.arange(_EXACT, 0, -1) / BLOCK - (offset - 1.0)
    return np.asarray(-ndtri(_inside(above)))


def _inside(p: Array) -> Array:
    """Keep a chance off nought: the smallest step of an offset is 2**-52."""
    return np.maximum(p, 2.0**-54)


def uniforms(cells: Strata) -> Array:
    """Return (k, n) stratified uniforms in [0, 1), in the order of the strata."""
    # Both terms are whole multiples of 2**-52, so that nothing is rounded.
    return (np.arange(BLOCK) / BLOCK - 1.0) + cells.offset


def plain_uniforms(words: Words) -> Array:
    """Return unstratified uniforms in (0, 1) from the upper 52 bits of raw words."""
    return ((words >> np.uint64(12)).astype(np.float64) + 0.5) * 2.0**-52
