"""What every shape must do, whatever its kind, and what each kind must do besides."""

import dataclasses
import itertools
import math

import mpmath
import numpy as np
import pytest
from scipy import stats
from scipy.integrate import quad
from scipy.interpolate import PchipInterpolator
from scipy.special import ndtr, ndtri

from contingency.quantities.curves import Curves
from contingency.quantities.shapes import (
    BetaPert,
    Discrete,
    Fixed,
    Normal,
    Points,
    Triangular,
    Uniform,
    standard_shape,
)
from tests.quantities.shape_samples import ALL, CONTINUOUS

SCORES = np.concatenate([np.linspace(-8.5, 8.5, 341), [-1e-9, 1e-9]])
CHANCES = np.array([1e-12, 1e-6, 0.01, 0.1, 0.25, 0.5, 0.7, 0.9, 0.99, 1 - 1e-6])


def each(shapes):
    """Run a test once for every shape of a table."""
    return pytest.mark.parametrize("shape", shapes.values(), ids=shapes.keys())


def size_of(shape):
    """The distance over which the shape varies."""
    return float(shape.at_score(3.0) - shape.at_score(-3.0)) or 1.0


def expectation(function, shape):
    """E[function(X)] by integrating over the normal score, piece by piece."""
    edges = [-12.0, *(b for b in (*shape.breaks, 0.0) if abs(b) < 12.0), 12.0]
    edges = sorted(set(edges))
    total = 0.0
    for left, right in itertools.pairwise(edges):
        part, _ = quad(
            lambda z: function(float(shape.at_score(z))) * stats.norm.pdf(z),
            left,
            right,
            epsabs=0.0,
            epsrel=1e-12,
            limit=400,
        )
        total += part
    return total


class TestEveryShape:
    """The contract."""

    @each(ALL)
    def test_the_quantile_rises_out_to_both_tails(self, shape):
        """A higher score never gives a lower value, and every value is finite."""
        values = shape.at_score(np.sort(SCORES))

        assert np.all(np.isfinite(values))
        assert np.all(np.diff(values) >= 0.0)

    @each(ALL)
    def test_score_and_chance_give_the_same_value(self, shape):
        """Q(p) and Q at the score of p agree where p has its digits."""
        scores = np.array([-8.5, -5.0, -2.0, -0.3, 0.4, 1.0, 2.5])

        np.testing.assert_allclose(
            shape.quantile(ndtr(scores)),
            shape.at_score(scores),
            atol=1e-9 * size_of(shape),
            rtol=1e-12,
        )

    @each(CONTINUOUS)
    def test_the_cdf_undoes_the_quantile(self, shape):
        """F(Q(p)) = p."""
        np.testing.assert_allclose(
            shape.cdf(shape.quantile(CHANCES)), CHANCES, rtol=1e-6, atol=1e-13
        )

    @each(ALL)
    def test_the_quantile_is_the_smallest_value_that_reaches_the_chance(self, shape):
        """F(Q(p)) >= p, and F just below Q(p) is at most p."""
        values = shape.quantile(CHANCES)
        step = 1e-9 * size_of(shape)

        assert np.all(shape.cdf(values + step) >= CHANCES * (1.0 - 1e-12))
        assert np.all(shape.cdf(values - step) <= CHANCES * (1.0 + 1e-12))

    @each(ALL)
    def test_mean_and_variance_are_those_of_the_quantile_curve(self, shape):
        """The closed forms equal the integrals over the normal score."""
        mean = expectation(lambda x: x, shape)
        variance = expectation(lambda x: (x - shape.mean) ** 2, shape)

        assert shape.mean == pytest.approx(mean, rel=1e-9, abs=1e-10 * size_of(shape))
        assert shape.variance == pytest.approx(variance, rel=1e-8, abs=1e-300)

    @each(ALL)
    def test_the_support_holds_every_value(self, shape):
        """The quantiles at 0 and 1 are the ends of the support."""
        low, high = shape.support

        assert float(shape.quantile(0.0)) == pytest.approx(low)
        assert float(shape.quantile(1.0)) == pytest.approx(high)

    @each(ALL)
    def test_the_standard_form_is_the_same_curve(self, shape):
        """X = location + scale * S, for every shape that has a standard form."""
        form = shape.standard_form()
        if form is None:
            assert not isinstance(shape, BetaPert | Triangular | Uniform)
            return
        key, location, scale = form
        standard = standard_shape(key)

        np.testing.assert_allclose(
            location + scale * standard.at_score(SCORES),
            shape.at_score(SCORES),
            atol=1e-11 * size_of(shape),
            rtol=0.0,
        )
        assert standard.standard_form() == (key, 0.0, 1.0)
        assert hash(key) == hash(standard.standard_form()[0])

    @each(ALL)
    def test_arrays_keep_their_form(self, shape):
        """A number gives a number, a table a table, whole numbers are taken too."""
        for call in (shape.cdf, shape.quantile, shape.at_score):
            assert np.shape(call(0.5)) == ()
            assert np.shape(call(np.full((2, 3), 0.5))) == (2, 3)
            assert np.asarray(call([0, 1])).dtype == np.float64

    @each(ALL)
    def test_a_shape_cannot_be_changed(self, shape):
        """Shapes are frozen and can be keys."""
        field = dataclasses.fields(shape)[0].name
        with pytest.raises(dataclasses.FrozenInstanceError):
            setattr(shape, field, 1.0)

        assert hash(shape) == hash(dataclasses.replace(shape))

    @each(ALL)
    def test_the_curve_is_smooth_between_its_breaks(self, shape):
        """Away from the breaks, second differences shrink with the step squared."""
        scores = np.linspace(-4.0, 4.0, 33) + 0.0123
        far = [
            min((abs(s - b) for b in shape.breaks), default=np.inf) > 0.05
            for s in scores
        ]

        def bend(step):
            return (
                shape.at_score(scores - step)
                - 2.0 * shape.at_score(scores)
                + shape.at_score(scores + step)
            ) / step**2

        assert sum(far) > 10
        np.testing.assert_allclose(
            bend(0.01)[far],
            bend(0.02)[far],
            atol=2e-3 * size_of(shape),
            rtol=2e-3,
        )


@pytest.mark.parametrize("name", ["pert", "pert, mode at low", "pert, P10-P90"])
@pytest.mark.parametrize("score", [-8.5, -6.0, -2.0, 2.0, 6.0, 8.5])
def test_beta_pert_tails_agree_with_forty_digits(name, score):
    """Both tails keep ten digits of the distance to their limit."""
    shape = CONTINUOUS[name]
    low, high = shape.support
    with mpmath.workdps(40):
        z = mpmath.mpf(score)
        chance = mpmath.erfc(-z / mpmath.sqrt(2)) / 2
        if score < 0:
            alpha, beta, away = shape.alpha, shape.beta, shape.at_score(score) - low
        else:
            alpha, beta, away = shape.beta, shape.alpha, high - shape.at_score(score)
            chance = mpmath.erfc(z / mpmath.sqrt(2)) / 2
        place = mpmath.findroot(
            lambda x: mpmath.betainc(alpha, beta, 0, x, regularized=True) / chance - 1,
            mpmath.mpf(float(away) / (high - low)),
        )

    assert float(away) / (high - low) == pytest.approx(
        float(place), rel=1e-10, abs=3e-15
    )


@pytest.mark.parametrize("score", [-8.5, -4.0, -0.2, 0.6, 3.0, 8.5])
def test_both_tails_keep_the_same_digits(score):
    """A shape and its mirror image about 0 agree to the last digits, tail for tail."""
    pairs = [
        (
            BetaPert(low=0.0, likely=0.3, high=1.0),
            BetaPert(low=-1, likely=-0.3, high=0),
        ),
        (
            Triangular(low=0.0, likely=0.3, high=1.0),
            Triangular(low=-1.0, likely=-0.3, high=0.0),
        ),
        (Uniform(low=0.0, high=1.0), Uniform(low=-1.0, high=0.0)),
    ]
    for shape, mirrored in pairs:
        assert float(mirrored.at_score(-score)) == pytest.approx(
            -float(shape.at_score(score)), rel=1e-13
        )


def test_the_library_of_scipy_agrees():
    """Same distribution functions as scipy.stats, which shares no formula of ours."""
    pairs = [
        (BetaPert(low=2.0, likely=5.0, high=11.0), stats.beta(7 / 3, 11 / 3, 2, 9)),
        (Triangular(low=2.0, likely=5.0, high=11.0), stats.triang(1 / 3, 2, 9)),
        (Uniform(low=2.0, high=11.0), stats.uniform(2, 9)),
        (Normal(centre=3.0, spread=2.0), stats.norm(3, 2)),
    ]
    x = np.linspace(0.0, 12.0, 49)
    for ours, theirs in pairs:
        np.testing.assert_allclose(ours.cdf(x), theirs.cdf(x), atol=1e-14)
        np.testing.assert_allclose(
            ours.quantile(CHANCES), theirs.ppf(CHANCES), rtol=1e-8
        )
        assert ours.mean == pytest.approx(theirs.mean())
        assert ours.variance == pytest.approx(theirs.var())


def test_a_lognormal_is_the_exponential_of_a_normal():
    """Mode, mean and shift of the shifted lognormal agree with scipy.stats."""
    ours = CONTINUOUS["lognormal, shifted"]
    theirs = stats.lognorm(ours.log_spread, loc=ours.shift, scale=ours.scale)
    mode = ours.mode
    x = np.array([mode - 1e-3, mode, mode + 1e-3])

    np.testing.assert_allclose(ours.cdf(x), theirs.cdf(x), rtol=1e-12)
    assert ours.mean == pytest.approx(theirs.mean())
    assert ours.variance == pytest.approx(theirs.var())
    assert np.argmax(theirs.pdf(x)) == 1
    assert float(ours.cdf(ours.shift - 1.0)) == 0.0


class TestTriangular:
    def test_it_breaks_at_its_mode(self):
        """The corner of the density is at the score of the mode, if it is inside."""
        shape = Triangular(low=0.0, likely=2.0, high=8.0)

        assert shape.breaks == (float(ndtri(0.25)),)
        assert float(shape.at_score(shape.breaks[0])) == pytest.approx(2.0, rel=1e-15)
        assert Triangular(low=0.0, likely=0.0, high=1.0).breaks == ()
        assert Triangular(low=0.0, likely=1.0, high=1.0).breaks == ()

    @pytest.mark.parametrize("likely", [0.0, 0.3, 1.0])
    def test_its_distribution_function_reaches_both_ends(self, likely):
        """0 at and below low, 1 at and above high, also with the mode at an end."""
        shape = Triangular(low=0.0, likely=likely, high=1.0)

        assert shape.cdf([-1.0, 0.0, 1.0, 2.0]).tolist() == [0.0, 0.0, 1.0, 1.0]


class TestDiscrete:
    shape = Discrete(values=(45.0, 50.0, 55.0), probabilities=(0.1, 0.6, 0.3))

    def test_a_chance_that_is_met_exactly_gives_the_lower_outcome(self):
        """Q is the smallest outcome with F >= p: at 0.1 and 0.7 still the lower one."""
        assert self.shape.quantile([0.1, 0.7]).tolist() == [45.0, 50.0]
        assert self.shape.quantile([0.1001, 0.7001]).tolist() == [50.0, 55.0]

    def test_it_jumps_at_its_breaks_and_nowhere_else(self):
        """At a break the lower outcome, right after it the upper one."""
        first, second = self.shape.breaks

        assert (first, second) == pytest.approx(ndtri([0.1, 0.7]), rel=1e-14)
        at = np.array([first, second])
        assert self.shape.at_score(at).tolist() == [45.0, 50.0]
        assert self.shape.at_score(np.nextafter(at, 9.0)).tolist() == [50.0, 55.0]

    def test_the_distribution_function_is_a_staircase(self):
        """It steps at the outcomes, each outcome included."""
        x = [44.9, 45.0, 49.9, 50.0, 54.9, 55.0, 99.0]

        assert self.shape.cdf(x).tolist() == pytest.approx(
            [0.0, 0.1, 0.1, 0.7, 0.7, 1.0, 1.0]
        )

    def test_a_rare_outcome_keeps_its_chance(self):
        """An outcome of one in a billion lies at its own score in the upper tail."""
        shape = Discrete(values=(0.0, 1.0), probabilities=(1 - 1e-9, 1e-9))

        assert shape.breaks[0] == pytest.approx(-ndtri(1e-9), rel=1e-12)


class TestPoints:
    shape = Points(percents=(5.0, 30.0, 50.0, 95.0), values=(92.0, 99.0, 104.0, 140.0))

    def test_the_curve_meets_its_points(self):
        """Q at each percent is the value given for it."""
        given = np.array(self.shape.percents) / 100.0

        np.testing.assert_allclose(
            self.shape.quantile(given), self.shape.values, rtol=1e-14
        )
        assert self.shape.breaks == pytest.approx(ndtri(given), rel=1e-14)

    def test_inner_slopes_are_those_of_pchip(self):
        """The inner points have the slopes of scipy's interpolator."""
        pchip = PchipInterpolator(self.shape._scores, self.shape.values)

        np.testing.assert_allclose(
            self.shape._slopes[1:-1],
            pchip.derivative()(self.shape._scores[1:-1]),
            rtol=1e-12,
        )

    def test_beyond_the_outermost_points_it_is_a_straight_line(self):
        """The line through the two outermost points, in the normal score."""
        scores, values = self.shape._scores, self.shape.values
        low = (values[1] - values[0]) / (scores[1] - scores[0])
        high = (values[-1] - values[-2]) / (scores[-1] - scores[-2])

        for away in (0.1, 1.0, 5.0):
            assert float(self.shape.at_score(scores[0] - away)) == pytest.approx(
                values[0] - low * away
            )
            assert float(self.shape.at_score(scores[-1] + away)) == pytest.approx(
                values[-1] + high * away
            )

    def test_two_points_are_a_normal(self):
        """Mean and standard deviation as from two percentiles of a normal."""
        shape = Points(percents=(10.0, 90.0), values=(80.0, 125.0))
        normal = stats.norm(102.5, 22.5 / ndtri(0.9))

        assert shape.mean == pytest.approx(normal.mean(), rel=1e-14)
        assert shape.variance == pytest.approx(normal.var(), rel=1e-13)
        np.testing.assert_allclose(
            shape.quantile(CHANCES), normal.ppf(CHANCES), rtol=1e-9
        )

    def test_level_ends_hold_their_chance(self):
        """Two equal outermost values: no value beyond, and all chance on the point."""
        shape = Points(percents=(10.0, 30.0, 90.0), values=(1.0, 1.0, 3.0))

        assert shape.support == (1.0, math.inf)
        assert float(shape.cdf(1.0)) == pytest.approx(0.3)
        assert float(shape.cdf(0.999)) == 0.0
        assert float(shape.quantile(0.0)) == 1.0

    def test_moments_agree_with_the_recursion_for_powers(self):
        """Integrals of z^k times the density, from M_k = (k-1) M_(k-2) + ends."""
        edges = [-np.inf, *self.shape._scores, np.inf]
        cubic = self.shape._cubics
        slopes, values, scores = (
            self.shape._slopes,
            self.shape.values,
            self.shape._scores,
        )
        pieces = [
            (scores[0], [values[0], slopes[0], 0.0, 0.0]),
            *((scores[i], list(cubic[:, i])) for i in range(3)),
            (scores[-1], [values[-1], slopes[-1], 0.0, 0.0]),
        ]
        first = second = 0.0
        for (start, terms), left, right in zip(
            pieces, edges[:-1], edges[1:], strict=True
        ):
            around = np.polynomial.Polynomial([-start, 1.0])
            curve = sum(c * around**k for k, c in enumerate(terms))
            moments = normal_moments(left, right)
            first += sum(c * moments[k] for k, c in enumerate(curve.coef))
            second += sum(c * moments[k] for k, c in enumerate((curve**2).coef))

        assert self.shape.mean == pytest.approx(first, rel=1e-13)
        assert self.shape.variance == pytest.approx(second - first**2, rel=1e-10)


def normal_moments(left, right):
    """Integrals of z^k times the standard normal density over an interval, k = 0..6."""

    def end(k, z):
        return 0.0 if np.isinf(z) else z**k * stats.norm.pdf(z)

    moments = [ndtr(right) - ndtr(left), end(0, left) - end(0, right)]
    for k in range(2, 7):
        moments.append((k - 1) * moments[k - 2] + end(k - 1, left) - end(k - 1, right))
    return moments


def test_fixed_steps_at_its_value():
    """Below the value chance 0, from there on 1."""
    assert Fixed(value=2.0).cdf([1.9, 2.0, 2.1]).tolist() == [0.0, 1.0, 1.0]


def test_ranges_alike_in_percent_share_one_key():
    """The same range on two bases differs by rounding only, and shares a table."""
    keys = set()
    for base in (1.0, 733.1, 1_234_567.89, 9.87e9):
        shape = BetaPert(low=0.9 * base, likely=1.0 * base, high=1.37 * base)
        keys.add(shape.standard_form()[0])

    assert len(keys) == 1


def test_a_table_does_not_depend_on_the_shapes_beside_it():
    """Two ranges with one key differ by rounding; each reads the same bits alone."""
    first, second = (
        BetaPert(low=0.9 * base, likely=base, high=1.37 * base)
        for base in (733.1, 1_234_567.89)
    )
    assert first.standard_form()[0] == second.standard_form()[0]

    def read(shapes, wanted):
        curves = Curves(shapes)
        values = np.empty((len(shapes), SCORES.size))
        curves.read(np.tile(SCORES, (len(shapes), 1)), 0, values)
        return values[curves.order.index(shapes.index(wanted))]

    assert np.array_equal(read([first, second], second), read([second], second))


def test_an_unknown_key_is_refused():
    """A key that no shape gave is a mistake of the caller."""
    with pytest.raises(ValueError, match="no standard shape"):
        standard_shape(("cauchy", 1.0))
