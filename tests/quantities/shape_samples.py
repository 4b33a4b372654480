"""Shapes of every kind, plain and awkward, for the tests of this folder."""

from contingency.quantities.shapes import (
    BetaPert,
    Discrete,
    Fixed,
    Lognormal,
    Normal,
    Points,
    Triangular,
    Uniform,
    from_range,
)

P10_P90 = {"low_percent": 10, "high_percent": 90}

CONTINUOUS = {
    "pert": BetaPert(low=80.0, likely=100.0, high=150.0),
    "pert, mode at low": BetaPert(low=100.0, likely=100.0, high=150.0),
    "pert, mode at high": BetaPert(low=80.0, likely=100.0, high=100.0),
    "pert, tiny": BetaPert(low=-2e-9, likely=1e-9, high=3e-9),
    "pert, P10-P90": from_range("pert", low=80, likely=100, high=150, **P10_P90),
    "pert, P10-P90, mode at low": from_range(
        "pert", low=100, likely=100, high=150, **P10_P90
    ),
    "triangular": Triangular(low=80.0, likely=100.0, high=150.0),
    "triangular, mode at low": Triangular(low=100.0, likely=100.0, high=150.0),
    "triangular, mode at high": Triangular(low=80.0, likely=100.0, high=100.0),
    "triangular, P10-P90": from_range("triangular", low=1, likely=3, high=8, **P10_P90),
    "uniform": Uniform(low=-5.0, high=7.0),
    "uniform, P10-P90": from_range("uniform", low=10, high=90, **P10_P90),
    "normal": Normal(centre=100.0, spread=12.0),
    "lognormal": from_range("lognormal", low=80, high=125, **P10_P90),
    "lognormal, shifted": from_range(
        "lognormal", low=-0.02, likely=0.03, high=0.1, **P10_P90
    ),
    "lognormal, nearly normal": from_range(
        "lognormal", low=1, likely=4.49, high=8, **P10_P90
    ),
    "lognormal, steep": Lognormal(median=50.0, scale=60.0, log_spread=1.2),
    "points, two": Points(percents=(10.0, 90.0), values=(80.0, 125.0)),
    "points, three": Points(percents=(5.0, 50.0, 95.0), values=(92.0, 104.0, 140.0)),
    "points, close": Points(
        percents=(1.0, 49.0, 50.0, 51.0, 99.0), values=(0.0, 9.0, 10.0, 20.0, 21.0)
    ),
}

WITH_STEPS = {
    "fixed": Fixed(value=-3.5),
    "discrete": Discrete(values=(45.0, 50.0, 55.0), probabilities=(0.1, 0.6, 0.3)),
    "discrete, rare": Discrete(values=(0.0, 1e6), probabilities=(0.999, 0.001)),
    "points, level inside": Points(
        percents=(10.0, 40.0, 60.0, 90.0), values=(1.0, 2.0, 2.0, 4.0)
    ),
    "points, level ends": Points(
        percents=(10.0, 30.0, 70.0, 90.0), values=(1.0, 1.0, 3.0, 3.0)
    ),
}

ALL = CONTINUOUS | WITH_STEPS
