"""Amounts in whole steps, so that the rounded parts add up to the rounded total.

Formulas: ``docs/method.md``, section "Rounding".
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from contingency.errors import PartsDoNotClose

Array = NDArray[np.float64]

_WHOLE_TOLERANCE = 1e-6
# A total given as a multiple of the step may miss one by this part of a step.


def round_amount(amount: float, step: float) -> float:
    """Return the multiple of `step` next to `amount`, halves away from zero.

    Parameters
    ----------
    amount : float
        Money.
    step : float
        Positive, same unit.

    Examples
    --------
    >>> round_amount(2_500.0, 1_000.0), round_amount(-2_500.0, 1_000.0)
    (3000.0, -3000.0)
    """
    return _steps(amount, step) * step


def round_parts(parts: ArrayLike, *, step: float, total: float | None = None) -> Array:
    """Return the parts in whole steps that add up to the rounded total exactly.

    Largest remainders: each part is rounded down to a step, and the steps that are
    then missing from the total go to the parts with the largest remainders, one each,
    ties to the earlier part ([1]_).  Among all whole parts with this sum the result
    has the smallest sum of differences.  Negative parts are treated alike: down is
    towards minus infinity.

    Parameters
    ----------
    parts : (k,) array of money
        Parts of any sign.
    step : float
        Positive, same unit.
    total : float, optional
        The rounded total, a multiple of `step`; without it the parts' own sum,
        rounded with halves away from zero.

    Returns
    -------
    (k,) array of money
        Each a multiple of `step` and less than one step from its part.

    Raises
    ------
    PartsDoNotClose
        parts-do-not-close.  `total` is no multiple of the step, or so far from the sum
        of the parts that some part would have to move by a whole step.

    References
    ----------
    .. [1] Balinski, M. L. and Young, H. P. (1982). Fair Representation. Yale
       University Press.  Hamilton's method.

    Examples
    --------
    >>> round_parts([10.4, 10.4, -0.3], step=1.0)
    array([11., 10.,  0.])
    """
    exact = np.asarray(parts, dtype=np.float64)
    in_steps = exact / step
    whole = np.floor(in_steps)
    aim = _steps(math.fsum(exact) if total is None else total, step)
    missing = aim - int(math.fsum(whole))
    off_step = total is not None and abs(total / step - aim) > _WHOLE_TOLERANCE
    if off_step or not 0 <= missing <= exact.size:
        raise PartsDoNotClose(
            where="rounded parts",
            found=f"Parts with the sum {math.fsum(exact):,.10g} and the total "
            f"{aim * step if total is None else total:,.10g} in steps of {step:,.10g}.",
            rule="The total is a whole number of steps, and no part moves by a whole "
            "step.",
            remedy="Round the sum of the parts, or take a smaller step.",
        )
    order = np.argsort(whole - in_steps, kind="stable")
    whole[order[:missing]] += 1.0
    rounded: Array = whole * step
    # No minus sign before an amount of nothing.
    return rounded + 0.0


def _steps(amount: float, step: float) -> int:
    """Return the number of steps next to `amount`, halves away from zero."""
    return int(math.copysign(math.floor(abs(amount) / step + 0.5), amount))
