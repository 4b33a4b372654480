"""The streams: found again by name, stratified, and the same in plain integers."""

import json
import subprocess
import sys
from hashlib import blake2b
from pathlib import Path
from statistics import NormalDist

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import kstest

from contingency.quantities.draws import (
    BLOCK,
    Source,
    plain_uniforms,
    raw_blocks,
    scores,
    strata,
    uniforms,
)

GOLDEN = Path(__file__).parents[1] / "golden" / "streams.json"
NAMES = ("range/P100", "event/R7", "systemic/S1")
WORD = 2**64 - 1


def philox(key, counter):
    """One call of Philox-4x64-10 in plain integers: Salmon et al. 2011, table 2."""
    k0, k1 = key
    x0, x1, x2, x3 = counter
    for _ in range(10):
        high0, low0 = divmod(x0 * 0xD2E7470EE14C6C93, 2**64)
        high1, low1 = divmod(x2 * 0xCA5A826395121157, 2**64)
        x0, x1, x2, x3 = high1 ^ x1 ^ k0, low1, high0 ^ x3 ^ k1, low0
        k0 = (k0 + 0x9E3779B97F4A7C15) & WORD
        k1 = (k1 + 0xBB67AE8584CAA73B) & WORD
    return x0, x1, x2, x3


def plain_words(seed, name, calls):
    """The raw words of some calls of a stream, from docs/method.md and nothing else."""
    digest = blake2b(f"contingency-draws/2|{seed}|{name}".encode(), digest_size=16)
    digest = digest.digest()
    key = (
        int.from_bytes(digest[:8], "little"),
        int.from_bytes(digest[8:], "little"),
    )
    return [word for call in calls for word in philox(key, (call, 0, 0, 0))]


def plain_uniforms_of(seed, name, block):
    """The stratified uniforms of a stream in trial order, as whole numbers of 2^-53."""
    words = plain_words(seed, name, range(513 * block + 1, 513 * block + 514))
    halves = [half for word in words[:2048] for half in (word % 2**32, word >> 32)]
    order = sorted(range(BLOCK), key=lambda trial: (halves[trial] >> 12, trial))
    common = words[2048] >> 36
    drawn = [0] * BLOCK
    for stratum, trial in enumerate(order):
        low = halves[stratum] % 4096
        drawn[trial] = ((stratum * 4096 + low) * 2**28 + common) * 2 + 1
    return drawn


@pytest.mark.parametrize("name", NAMES)
def test_plain_integers_give_the_same_words(name):
    """Philox written out in Python integers, keyed as the documentation says."""
    raw = Source(20260401).words(name, 7, 16)

    assert raw.ravel().tolist() == plain_words(20260401, name, range(8, 24))


@pytest.mark.parametrize("block", [0, 5])
@pytest.mark.parametrize("name", NAMES)
def test_plain_numbers_give_the_same_uniforms(name, block):
    """The whole way from a name to uniforms, to the last bit."""
    cells = strata(Source(7), [name], block)
    ours = np.empty(BLOCK)
    ours[cells.trial[0]] = uniforms(cells)[0]

    assert (ours * 2.0**53).tolist() == plain_uniforms_of(7, name, block)


@pytest.mark.parametrize("name", NAMES)
def test_plain_numbers_give_the_same_scores(name):
    """And from there to normal scores, with the inverse normal of Python itself."""
    ours = scores(strata(Source(7), [name], 0))[0]
    inverse = NormalDist().inv_cdf
    plain = [inverse(u / 2**53) for u in plain_uniforms_of(7, name, 0)]

    assert ours == pytest.approx(plain, abs=2e-7)


def test_plain_numbers_give_the_same_uniforms_without_strata():
    """The impacts of repeated events: the upper 52 bits of one word for each trial."""
    words = plain_words(7, "event/R7/1", range(1024 * 3 + 1, 1024 * 3 + 1025))
    plain = [((word >> 12) + 0.5) / 2**52 for word in words]

    assert plain_uniforms(Source(7), "event/R7/1", 3).tolist() == plain


def test_several_blocks_at_once_are_the_same():
    """Drawn in one call or block by block."""
    source = Source(5)
    together = raw_blocks(source, NAMES, range(2, 6))

    for i, block in enumerate(range(2, 6)):
        alone = raw_blocks(source, NAMES, range(block, block + 1))
        assert np.array_equal(together.halves[i], alone.halves[0])
        assert np.array_equal(together.fine[i], alone.fine[0])


def test_the_first_draws_are_those_of_the_golden_file():
    """A change of the streams is a change of every issued figure: it must be seen."""
    source = Source(1)
    found = {
        name: {
            "words": [
                f"{word:016x}" for word in source.words(name, 0, 2).ravel().tolist()
            ],
            "scores": [
                f"{score:.9f}" for score in scores(strata(source, [name], 0))[0][:8]
            ],
        }
        for name in NAMES
    }

    assert found == json.loads(GOLDEN.read_text(encoding="utf-8"))


def test_a_new_process_draws_the_same():
    """Same seed, same numbers, whatever the hash seed of the process."""
    code = (
        "from contingency.quantities.draws import Source;"
        "print(Source(0).words('range/P1', 0, 1).tolist())"
    )
    printed = [
        subprocess.run(
            [sys.executable, "-c", code],
            capture_output=True,
            text=True,
            check=True,
            env={"PYTHONHASHSEED": seed, "PYTHONPATH": str(GOLDEN.parents[2])},
        ).stdout
        for seed in ("1", "2")
    ]

    assert printed[0] == printed[1] == f"{Source(0).words('range/P1', 0, 1).tolist()}\n"


def test_every_stratum_holds_one_draw():
    """One score in each of 4,096 cells of equal chance, to the polynomials' error."""
    drawn = np.sort(scores(strata(Source(1), [f"x{i}" for i in range(20)], 2)))
    edges = ndtri(np.arange(BLOCK + 1) / BLOCK)

    assert np.all(drawn >= edges[:-1] - 2e-7)
    assert np.all(drawn <= edges[1:] + 2e-7)


def test_scores_are_the_inverse_normal_of_the_uniforms():
    """The parabolas stay within 2e-7 of the inverse normal itself."""
    cells = strata(Source(3), [f"x{i}" for i in range(50)], 0)
    exact = np.empty((50, BLOCK))
    for row, u in enumerate(uniforms(cells)):
        exact[row][cells.trial[row]] = ndtri(u)

    assert scores(cells) == pytest.approx(exact, abs=2e-7)


def test_the_place_within_the_outermost_stratum_is_uniform():
    """Where the order of the words could leak into the place, it does not."""
    places = [
        strata(Source(seed), ["x"], block).place[0, [0, -1]] / BLOCK
        for seed in range(40)
        for block in range(10)
    ]

    for column in np.array(places).T:
        assert kstest(column, "uniform").pvalue > 0.001


def test_two_streams_are_not_correlated():
    """Names next to each other give scores that know nothing of each other."""
    drawn = scores(strata(Source(1), [f"range/P{i}" for i in range(40)], 0))
    correlation = np.corrcoef(drawn)[np.triu_indices(40, 1)]

    # 780 pairs: the largest of as many normal correlations is about 3.2 / 64.
    assert np.abs(correlation).max() < 5 / np.sqrt(BLOCK)
    assert np.square(correlation).mean() * BLOCK == pytest.approx(1.0, abs=0.2)


def test_the_place_knows_nothing_of_the_order():
    """Neither of the trial that has the stratum, nor of the place next to it."""
    cells = strata(Source(11), [f"x{i}" for i in range(200)], 0)
    place = cells.place - cells.place.mean(axis=1, keepdims=True)

    for other in (cells.trial - 2047.5, np.roll(place, 1, axis=1)):
        found = (place * other).mean() / (place.std() * other.std())
        assert abs(found) < 4 / np.sqrt(place.size)


class Extreme:
    """A source whose every word is the same."""

    def __init__(self, word):
        self.word = word

    def words(self, name, first_call, calls):
        """As `Source.words`."""
        del name, first_call
        return np.full((calls, 4), self.word, dtype=np.uint64)


@pytest.mark.parametrize("word", [0, 2**64 - 1])
def test_uniforms_stay_inside(word):
    """Neither nought nor one, whatever the words; nor is a score without end."""
    source = Extreme(word)
    cells = strata(source, ["x"], 0)

    for u in (uniforms(cells), plain_uniforms(source, "x", 0)):
        assert np.all((u > 0.0) & (u < 1.0))
    assert np.all(np.abs(scores(cells)) < 8.3)
