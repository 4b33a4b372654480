"""What other definitions make of a percentile, on twelve measurements.

Source     NIST/SEMATECH e-Handbook of Statistical Methods, section 7.2.6.2. The figures
           were read in the tests of two general mathematics libraries that quote it.
Taken      twelve measurements; P90 = 95.1981 and P75 = 95.1896 by the rank p (N + 1).
Precision  four decimals, as printed.
Errata     none known.
"""

import numpy as np
import pytest

from contingency.quantities.percentiles import percentile, rank

MEASUREMENTS = np.array(
    [
        *(95.1772, 95.1567, 95.1937, 95.1959, 95.1442, 95.0610),
        *(95.1591, 95.1195, 95.1065, 95.0925, 95.1990, 95.1682),
    ]
)
PRINTED = {90: 95.1981, 75: 95.1896}


@pytest.mark.parametrize(("percent", "printed"), PRINTED.items())
def test_the_printed_percentile_is_the_blend_by_p_times_n_plus_one(percent, printed):
    """The handbook's definition, as numpy has it under the name weibull."""
    found = np.percentile(MEASUREMENTS, percent, method="weibull")

    assert found == pytest.approx(printed, abs=5e-5)


@pytest.mark.parametrize(("percent", "printed"), PRINTED.items())
def test_ours_is_the_measurement_just_below_the_blend(percent, printed):
    """Definition 1 takes a measurement; the printed blend lies before the next one."""
    ordered = np.sort(MEASUREMENTS)
    place = rank(12, percent)

    assert percentile(ordered, percent) == ordered[place - 1]
    assert ordered[place - 1] < printed < ordered[place]


@pytest.mark.parametrize("percent", [5, 25, 50, 75, 90, 95])
def test_the_definition_is_numpys_inverted_cdf(percent):
    """Hyndman and Fan's definition 1 under numpy's name for it."""
    found = percentile(np.sort(MEASUREMENTS), percent)

    assert found == np.percentile(MEASUREMENTS, percent, method="inverted_cdf")


def test_with_many_trials_the_choice_makes_no_difference():
    """At 65,536 trials all nine definitions lie within two neighbouring trials."""
    trials = np.sort(np.random.default_rng(8).normal(size=65_536))
    place = rank(trials.size, 80)
    methods = [
        *("inverted_cdf", "averaged_inverted_cdf", "closest_observation", "hazen"),
        *("interpolated_inverted_cdf", "weibull", "linear"),
        *("median_unbiased", "normal_unbiased"),
    ]

    for method in methods:
        found = np.percentile(trials, 80, method=method)
        assert trials[place - 2] <= found <= trials[place + 1]
