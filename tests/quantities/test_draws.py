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


def plain_words(seed, name, block, count):
    """The raw words of a stream, from docs/method.md and nothing else."""
    text = f"contingency-draws/1|{seed}|{block}|{name}".encode()
    digest = blake2b(text, digest_size=16).digest()
    key = (
        int.from_bytes(digest[:8], "little"),
        int.from_bytes(digest[8:], "little"),
    )
    words = []
    for call in range(1, -(-count // 4) + 1):
        words += philox(key, (call, 0, 0, 0))
    return words[:count]


def plain_scores(seed, name, block):
    """The stratified normal scores of a stream in trial order, in plain numbers."""
    words = plain_words(seed, name, block, BLOCK)
    order = sorted(range(BLOCK), key=lambda trial: (words[trial] >> 12, trial))
    inverse = NormalDist().inv_cdf
    drawn = [0.0] * BLOCK
    for stratum, trial in enumerate(order):
        # Bits 12 to 39 of the word, then the trial's number, make the place.
        bits = (words[trial] & 0xFFFFFFF000 | trial) & (2**40 - 1)
        place = bits / 2**40
        p = max((stratum + place) / BLOCK, 2.0**-54)
        drawn[trial] = inverse(p)
    return drawn


@pytest.mark.parametrize("name", NAMES)
def test_plain_integers_give_the_same_words(name):
    """Philox written out in Python integers, keyed as the documentation says."""
    raw = Source(20260401).raw(name, 3)

    assert raw[:64].tolist() == plain_words(20260401, name, 3, 64)


@pytest.mark.parametrize("name", NAMES)
def test_plain_numbers_give_the_same_scores(name):
    """The whole way from a name to normal scores, written again from the method."""
    ours = scores(strata(Source(7), [name], 0))[0]

    assert ours == pytest.approx(plain_scores(7, name, 0), abs=2e-7)


def test_the_first_draws_are_those_of_the_golden_file():
    """A change of the streams is a change of every issued figure: it must be seen."""
    source = Source(1)
    found = {
        name: {
            "words": [f"{word:016x}" for word in source.raw(name, 0)[:8].tolist()],
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
        "print(Source(0).raw('range/P1', 0)[:4].tolist())"
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

    assert printed[0] == printed[1] == f"{Source(0).raw('range/P1', 0)[:4].tolist()}\n"


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
        (strata(Source(seed), ["x"], block).offset[0, [0, -1]] - 1.0) * BLOCK
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


def test_plain_uniforms_stay_inside():
    """Neither nought nor one, whatever the word."""
    words = np.array([0, 2**64 - 1], dtype=np.uint64)

    assert np.all((plain_uniforms(words) > 0.0) & (plain_uniforms(words) < 1.0))
