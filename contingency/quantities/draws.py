"""Draws that can be found again by name, in Latin hypercube blocks.

A stream is found by three things: seed, name and block.  A BLAKE2b hash of the first
two is the key of the counter generator Philox-4x64-10 ([1]_), the block is a stretch
of its counter, and the numbers are its raw 64-bit output.  Nothing else of numpy's
generators is used, so the numbers do not depend on the version of a library, and
adding, dropping or reordering inputs leaves every other input's draws as they were.

Within a block each stream is stratified ([2]_).  A trial has half a raw number, 32
bits: the order of their upper 20 is the permutation of the strata, the lower 12 are
the place within the stratum, to which one more raw number adds bits that the block's
trials have in common.  ``docs/method.md``, section "Streams", describes this
completely enough to write it again in another language.

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
from functools import lru_cache
from hashlib import blake2b
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

if TYPE_CHECKING:
    from collections.abc import Sequence

Array = NDArray[np.float64]
Words = NDArray[np.uint64]
Halves = NDArray[np.uint32]
Order = NDArray[np.int64]

BLOCK = 4096
"""Trials in one Latin hypercube; a constant of the method."""

_CALLS = BLOCK // 8 + 1
"""Philox calls, of four words each, for a stratified block: half a word for each
trial, then one word for all."""
_TRIALS = np.arange(BLOCK, dtype=np.uint32)
_LOW_BITS = np.uint32(BLOCK - 1)
_ORDER_BITS = np.uint32(2**32 - BLOCK)

_EXACT = 32
"""Strata at either end whose scores come from the inverse normal itself."""
_CURVED = 512
"""Strata at either end, beyond the exact ones, that take a parabola; the others take
a straight line."""


def stream_key(seed: int, name: str) -> Words:
    """Return the (2,) Philox key of one stream."""
    text = f"contingency-draws/2|{seed}|{name}"
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
        self._counter = np.zeros(4, dtype=np.uint64)
        self._state["state"] = {"counter": self._counter, "key": self._key}

    def words(self, name: str, first_call: int, calls: int) -> Words:
        """Return raw 64-bit numbers of a stream, (calls, 4)."""
        self._key[:] = stream_key(self._seed, name)
        # The generator adds one before each call.
        self._counter[0] = first_call
        self._generator.state = self._state
        return self._generator.random_raw(4 * calls).reshape(calls, 4)


@dataclass(frozen=True, kw_only=True, slots=True)
class RawBlocks:
    """What the strata of some streams are made from, for some blocks in a row.

    Axes: ``b`` blocks, ``k`` streams, ``n`` = 4,096 trials.
    """

    halves: Halves
    """(b, k, n) half a raw number for each trial."""
    fine: Array
    """(b, k, 1) what the trials of a stream have in common below their own bits:
    inside 0 to 1."""


def raw_blocks(
    source: Source, names: Sequence[str], blocks: range, into: RawBlocks | None = None
) -> RawBlocks:
    """Return the raw numbers of the named streams for consecutive blocks.

    Several blocks at once take fewer and longer calls, which threads share better.
    `into` are raw numbers of as many streams and blocks that are used no more.
    """
    if into is not None and into.fine.shape[:2] == (len(blocks), len(names)):
        halves = into.halves
    else:
        halves = np.empty((len(blocks), len(names), BLOCK), dtype="<u4")
    fine = np.empty((len(blocks), len(names), 1))
    for row, name in enumerate(names):
        words = source.words(name, blocks.start * _CALLS, len(blocks) * _CALLS)
        words = words.reshape(len(blocks), -1)
        # Lower half first, on every machine.
        halves[:, row] = words.astype("<u8", copy=False).view("<u4")[:, :BLOCK]
        fine[:, row, 0] = words[:, BLOCK // 2] >> np.uint64(36)
    fine += 0.5
    fine /= 2**28
    return RawBlocks(halves=halves, fine=fine)


class Space:
    """Arrays in which strata and scores are made, for up to `rows` streams at once.

    Fresh arrays of this size would be taken from the system and given back each time,
    which costs as much as the arithmetic.
    """

    def __init__(self, rows: int) -> None:
        # One piece, so that it is large enough for large pages of memory.
        whole = np.empty((3, rows, BLOCK))
        self.place = whole[0]
        self.cell = whole[1].view(np.int64)
        keys = whole[2].view(np.uint32).reshape(-1)[: rows * BLOCK]
        self.keys = keys.reshape(rows, BLOCK)
        self.start = (BLOCK * np.arange(rows, dtype=np.uint32))[:, None]


@dataclass(frozen=True, kw_only=True, slots=True)
class Strata:
    """The Latin hypercube of some streams in one block.

    Axes: ``k`` streams, ``n`` = 4,096 strata in rising order.  Lives in a `Space`,
    until that is used again.
    """

    cell: Order
    """(k, n) the trial that each stratum belongs to, counted on from row to row: row
    times 4,096 plus trial."""
    place: Array
    """(k, n) how far the uniform lies above its stratum's lower end, in 4,096ths of
    the stratum: inside 0 to 4,096."""

    @property
    def trial(self) -> Order:
        """(k, n) the trial that each stratum belongs to."""
        return self.cell & (BLOCK - 1)


def strata(source: Source, names: Sequence[str], block: int) -> Strata:
    """Return the strata of the named streams in one block."""
    raw = raw_blocks(source, names, range(block, block + 1))
    return strata_of(raw.halves[0], raw.fine[0], Space(len(names)))


def strata_of(halves: Halves, fine: Array, space: Space) -> Strata:
    """Return the strata of the streams of one block.

    Parameters
    ----------
    halves : (k, n) array
    fine : (k, 1) array
        As in `RawBlocks`.
    space : Space
        Of ``k`` rows or more.
    """
    rows = slice(len(halves))
    keys, cell, place = space.keys[rows], space.cell[rows], space.place[rows]
    # The lower bits know nothing of the order, so stratum i may as well take those of
    # trial i: nothing has to be carried along.
    np.bitwise_and(halves, _LOW_BITS, out=keys)
    place[:] = keys
    place += fine
    # The trial's number stands where the place stood: one sort of whole numbers then
    # yields the permutation, several times as fast as an index sort.
    np.bitwise_and(halves, _ORDER_BITS, out=keys)
    keys |= _TRIALS
    keys.sort(axis=1)
    keys &= _LOW_BITS
    keys |= space.start[rows]
    cell[:] = keys
    return Strata(cell=cell, place=place)


@lru_cache(maxsize=16)
def _score_polynomial(scale: float) -> tuple[Array, Array, Array]:
    """Return coefficients (n,) of a parabola in `place` for each stratum.

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
    first[middle] = (above - below) / (nodes[1] - nodes[0]) / BLOCK
    constant[middle] = below - first[middle] * (nodes[0] * BLOCK)
    return scale * second, scale * first, scale * constant


_NODES = np.cos(np.pi * (2 * np.arange(3) + 1) / 6) / 2 + 0.5
_THROUGH_NODES = np.linalg.inv(np.vander(_NODES * BLOCK, 3))


def parabolas(lower: Array, width: Array | float) -> tuple[Array, Array, Array]:
    """Return parabolas in `place` for normal scores of slices of a uniform.

    Parameters
    ----------
    lower : (m,) array
        Chance at the lower end of each slice; the ends stay inside 0 to 1.
    width : float or (m,) array
        Chance that one stratum, 1/4096 of the stream's uniform, stands for.

    Returns
    -------
    second, first, constant : (m,) arrays
        ``(second * place + first) * place + constant`` is the normal score.
    """
    second, first, constant = _THROUGH_NODES @ ndtri(lower + width * _NODES[:, None])
    return second, first, constant


def scores(cells: Strata, out: Array | None = None, scale: float = 1.0) -> Array:
    """Return (k, n) stratified normal scores, times `scale`, in trial order.

    The cells are used up: their places become scores.

    Stratum i of 4,096 holds the score ``ndtri((i + place / 4096) / 4096)``.
    """
    second, first, constant = _score_polynomial(scale)
    value = cells.place
    ends = [
        (curved, second[curved] * np.square(value[:, curved]))
        for curved in (slice(None, _CURVED), slice(-_CURVED, None))
    ]
    tails = [
        (tail, scale * _tail_scores(value[:, tail], lower=tail.stop))
        for tail in (slice(None, _EXACT), slice(-_EXACT, None))
    ]
    # In place: what the cache need not hold is the quickest to reach.
    value *= first
    value += constant
    for curved, square in ends:
        value[:, curved] += square
    for tail, exact in tails:
        value[:, tail] = exact
    if out is None:
        out = np.empty_like(value)
    # One assignment for all rows: a short one would hold the interpreter's lock.
    out.reshape(-1)[cells.cell] = value
    return out


def _tail_scores(place: Array, *, lower: int | None) -> Array:
    """Return exact scores of the outermost strata, upper ones by symmetry."""
    if lower:
        return np.asarray(ndtri(np.arange(_EXACT) / BLOCK + place / BLOCK**2))
    above = np.arange(_EXACT, 0, -1) / BLOCK - place / BLOCK**2
    return np.asarray(-ndtri(above))


def uniforms(cells: Strata) -> Array:
    """Return (k, n) stratified uniforms inside 0 to 1, in the order of the strata."""
    # Both terms are whole multiples of 2**-53, so that nothing is rounded.
    return np.arange(BLOCK) / BLOCK + cells.place / BLOCK**2


def plain_uniforms(source: Source, name: str, block: int) -> Array:
    """Return (n,) uniforms in (0, 1) that are not stratified, in trial order.

    From the upper 52 bits of one raw number for each trial.
    """
    calls = BLOCK // 4
    words = source.words(name, block * calls, calls).reshape(-1)
    return ((words >> np.uint64(12)).astype(np.float64) + 0.5) * 2.0**-52
