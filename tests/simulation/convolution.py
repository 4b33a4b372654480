"""Exact distributions of a sum by numerical convolution, for comparison.

Written from the definition: masses on a uniform grid, multiplied as Fourier
transforms.  Shares nothing with the engine but the shapes' cdf.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr, ndtri

POINTS = 2**15


@dataclass(frozen=True, kw_only=True)
class Grid:
    """Values `start`, `start` + `step`, ... of a sum."""

    start: float
    step: float

    @classmethod
    def over(cls, low: float, high: float) -> Grid:
        """A grid from `low` to `high`."""
        return cls(start=low, step=(high - low) / POINTS)


def masses(cdf, step, start):
    """Chances of the cells around each point of a grid."""
    edges = start + step * (np.arange(POINTS + 1) - 0.5)
    return np.diff(cdf(edges))


def shape_masses(shape, step):
    """Masses of a shape and the value of the first cell."""
    low, high = shape.support
    start = np.floor((low if np.isfinite(low) else shape.quantile(1e-13)) / step) * step
    del high
    return masses(shape.cdf, step, start), float(start)


def event_masses(shape, probability, sign, step):
    """Masses of an event that happens once: an atom at nought and its impact."""
    mass, start = shape_masses(shape, step)
    first = round(start / step)
    spread = np.zeros(POINTS)
    at = (sign * (first + np.arange(POINTS))) % POINTS
    np.add.at(spread, at, probability * mass)
    spread[0] += 1.0 - probability
    return spread


def repeated_masses(shape, frequency, step):
    """Masses of a Poisson number of impacts, by its transform."""
    once = event_masses(shape, 1.0, 1, step)
    return np.fft.irfft(np.exp(frequency * (np.fft.rfft(once) - 1.0)), POINTS)


def convolve(parts):
    """Masses of the sum of independent parts, cell by cell; indices wrap round."""
    return np.fft.irfft(np.prod([np.fft.rfft(part) for part in parts], axis=0), POINTS)


@dataclass(frozen=True, kw_only=True)
class Exact:
    """The distribution of a sum on a grid, in rising order."""

    value: np.ndarray
    cumulative: np.ndarray

    def percentile(self, percent: int) -> float:
        """The cost not exceeded with this chance, by a straight line in the cell."""
        p = percent / 100
        cell = int(np.searchsorted(self.cumulative, p))
        step = self.value[1] - self.value[0]
        before = self.cumulative[cell - 1]
        inside = (p - before) / (self.cumulative[cell] - before)
        return float(self.value[cell] - step / 2 + inside * step)

    def chance(self, cost: float) -> float:
        """The chance of not exceeding `cost`."""
        step = self.value[1] - self.value[0]
        return float(np.interp(cost, self.value + step / 2, self.cumulative))


def exact_total(shapes, events=(), *, low, high, repeated=()):
    """The total of independent shapes and events.

    `events` are (shape, probability, sign), `repeated` are (shape, frequency); the
    total lies between `low` and `high`.
    """
    step = (high - low) / POINTS
    parts, start = [], 0.0
    for shape in shapes:
        mass, first = shape_masses(shape, step)
        parts.append(mass)
        start += first
    parts += [event_masses(shape, p, sign, step) for shape, p, sign in events]
    parts += [repeated_masses(shape, rate, step) for shape, rate in repeated]
    return in_order(convolve(parts), start, step, low)


def in_order(mass, start, step, low):
    """The distribution with its wrapped cells put back in rising order."""
    value = start + step * np.arange(POINTS)
    # Savings reach below the first cell: those cells stand at the end.
    value = np.where(value >= low + step * POINTS, value - step * POINTS, value)
    order = np.argsort(value)
    return Exact(value=value[order], cumulative=np.cumsum(mass[order]))


def exact_one_factor(shapes, general, *, low, high, nodes=161):
    """The total of shapes joined by one common factor, by conditioning on it."""
    step = (high - low) / POINTS
    factor = np.linspace(-7.0, 7.0, nodes)
    weight = np.exp(-(factor**2) / 2)
    weight /= weight.sum()
    mixed = np.zeros(POINTS)
    start = sum(shape_masses(shape, step)[1] for shape in shapes)
    for f, w in zip(factor, weight, strict=True):
        parts = []
        for shape in shapes:
            first = shape_masses(shape, step)[1]

            def given(x, shape=shape, f=f):
                with np.errstate(divide="ignore"):
                    score = ndtri(shape.cdf(x))
                return ndtr((score - np.sqrt(general) * f) / np.sqrt(1.0 - general))

            parts.append(masses(given, step, first))
        mixed += w * convolve(parts)
    return in_order(mixed, start, step, low)
