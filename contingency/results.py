"""The results contract: one object that stays readable for years.

``docs/results.md`` lists the keys.  Keys may be added, none is renamed or dropped.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from typing import Any

from contingency.assurance.calibration import Calibration
from contingency.assurance.evidence import evidence_score
from contingency.assurance.findings import CheckOutcome, Finding
from contingency.assurance.material import Material
from contingency.assurance.outside_view import outside_view
from contingency.assurance.robustness import Robustness
from contingency.estimate.nouns import Answer
from contingency.quantities.predictive import LognormalFit
from contingency.setting.allocation import Split
from contingency.setting.funding import Outturn
from contingency.setting.levels import FundingLevel
from contingency.version import VERSION

FORMAT = "contingency-results/1"
METHOD = "contingency-method/2"
DIGITS = 12
"""Significant digits of a figure.  The last four of a float depend on the order in
which a processor adds, and say nothing about money."""


def as_json(results: dict[str, Any]) -> bytes:
    """Return results as JSON text in UTF-8, the same bytes for the same inputs."""
    text = json.dumps(results, indent=2, ensure_ascii=False, allow_nan=False)
    return (text + "\n").encode("utf-8")


def results_of(
    study: Material,
    findings: Sequence[Finding],
    checks_run: Sequence[CheckOutcome],
) -> dict[str, Any]:
    """Return the results contract of a study; price-date money, unrounded."""
    estimate, simulation = study.estimate, study.simulation
    return {
        "format": FORMAT,
        "tool": {"name": "contingency", "version": VERSION},
        "estimate": {
            "project": estimate.project,
            "revision": estimate.revision,
            "currency": estimate.currency,
            "price_date": estimate.price_date.isoformat(),
            "class": estimate.estimate_class,
            "fingerprint": estimate.fingerprint,
        },
        "run": {
            "seed": simulation.seed,
            "trials": simulation.trials,
            "block": simulation.block,
            "blocks": simulation.blocks,
            "settled": simulation.settled,
            "method": METHOD,
        },
        "base": figure(estimate.base),
        "mean": figure(study.mean),
        "standard_deviation": figure(study.standard_deviation),
        "chance_base_is_enough": figure(study.chance_base_is_enough),
        "percentiles": {
            f"P{percent:02d}": figure(total)
            for percent, total in enumerate(study.percentiles, start=1)
        },
        "levels": [_level(level) for level in study.levels],
        "target": _target(study.target),
        "split": _split(study.allocation.split),
        "allocation": _allocation(study),
        "second_opinion": _second_opinion(study),
        "drivers": _drivers(study),
        "dependence": _dependence(study),
        "cross_check": _cross_check(study),
        "findings": [finding_object(finding) for finding in findings],
        "checks_run": [
            {"check": check.check, "title": check.title, "outcome": check.outcome}
            for check in checks_run
        ],
        "funding": _funding(study),
        "outturn": _outturn(study.outturn),
        "evidence": _evidence(study),
        "robustness": _robustness(study.robustness),
        "outside_view": _outside(study),
    }


def figure(value: float) -> float:
    """Return a figure to twelve significant digits."""
    rounded = float(f"{value:.{DIGITS}g}")
    return rounded or 0.0


def _target(level: FundingLevel) -> dict[str, Any]:
    return {
        "level": level.name,
        "total": figure(level.total),
        "contingency": figure(level.contingency),
        "percent_of_base": figure(level.percent_of_base),
        "interval": [figure(level.low), figure(level.high)],
    }


def _level(level: FundingLevel) -> dict[str, Any]:
    named = _target(level)
    return {
        "level": named.pop("level"),
        "purpose": level.purpose,
        "holder": level.holder,
        **named,
    }


def _split(split: Split) -> dict[str, Any]:
    return {
        "ranges": figure(split.ranges),
        "systemic": figure(split.systemic),
        "events": figure(split.events),
        "estimate_uncertainty": figure(split.estimate_uncertainty),
        "contingency": figure(split.contingency),
    }


def _allocation(study: Material) -> list[dict[str, Any]]:
    return [
        {
            "package": row.package,
            "name": row.name,
            "base": figure(row.base),
            "ranges": figure(row.ranges),
            "systemic": figure(row.systemic),
            "events": figure(row.events),
            "contingency": figure(row.contingency),
            "expected": figure(row.expected),
            "margin": figure(row.margin),
            "variance_share": figure(row.variance_share),
        }
        for row in study.allocation.rows
    ]


def _second_opinion(study: Material) -> dict[str, Any]:
    opinion = study.second_opinion
    return {
        "split": _split(opinion.split),
        "allocation": [
            {"package": row.package, "contingency": figure(amount)}
            for row, amount in zip(
                study.allocation.rows, opinion.contingency, strict=True
            )
        ],
    }


def _drivers(study: Material) -> list[dict[str, Any]]:
    return [
        {
            "id": driver.id,
            "name": driver.name,
            "kind": driver.kind,
            "variance_share": figure(driver.variance_share),
            "mean_shift": figure(driver.mean_shift),
            "swing": [figure(driver.swing[0]), figure(driver.swing[1])],
            "removal_effect": figure(driver.removal_effect),
        }
        for driver in study.drivers
    ]


def _dependence(study: Material) -> dict[str, Any]:
    average, repair = study.implied_average_correlation, study.correlation_repair
    return {
        "implied_average_correlation": None if average is None else figure(average),
        "repair": None
        if repair is None
        else {"largest_change": figure(repair[0]), "pair": [repair[1], repair[2]]},
    }


def _cross_check(study: Material) -> dict[str, Any]:
    check = study.cross_check
    return {
        "mean": {
            "simulated": figure(check.mean.simulated),
            "exact": figure(check.mean.exact),
        },
        "standard_deviation": {
            "simulated": figure(check.standard_deviation.simulated),
            "exact": figure(check.standard_deviation.exact),
        },
        "levels": [
            {
                "level": f"P{level.percent:02d}",
                "simulated": figure(level.simulated),
                "second_route": figure(level.second_route),
                "allowed": [figure(level.allowed_low), figure(level.allowed_high)],
            }
            for level in check.levels
        ],
        "passed": check.passed,
    }


def _funding(study: Material) -> list[dict[str, Any]] | None:
    """Return the funding table; base and contingency in price-date money."""
    if not study.funding:
        return None
    return [
        {
            "year": year.year,
            "base": figure(year.base),
            "contingency": figure(year.contingency),
            "escalation_on_base": figure(year.escalation_on_base),
            "escalation_on_contingency": figure(year.escalation_on_contingency),
            "total": figure(year.total),
        }
        for year in study.funding
    ]


def _outturn(outturn: Outturn | None) -> dict[str, Any] | None:
    """Return how sure the funding table is, in money of the years of spending."""
    if outturn is None:
        return None
    return {
        "funding": figure(outturn.funding),
        "chance_funding_is_enough": figure(outturn.chance_funding_is_enough),
        "mean": figure(outturn.mean),
        "level": f"P{outturn.percent:02d}",
        "total": figure(outturn.level),
        "interval": [figure(outturn.low), figure(outturn.high)],
        "series": [
            {
                "id": series.id,
                "name": series.name,
                "mean_rate": figure(series.rate),
                "base": figure(series.base),
            }
            for series in outturn.series
        ],
    }


def _evidence(study: Material) -> dict[str, float] | None:
    """Return the fractions of the variance by what backs them."""
    score = evidence_score(study)
    if score is None:
        return None
    return {
        "data": figure(score.data),
        "analogue": figure(score.analogue),
        "judgement": figure(score.judgement),
        "nothing": figure(score.nothing),
    }


def _robustness(rested: Robustness | None) -> dict[str, Any] | None:
    """Return what the contingency at the target rests on."""
    if rested is None:
        return None
    return {
        "trials": rested.trials,
        "what_if": [
            {
                "slug": one.slug,
                "title": one.title,
                "contingency": None
                if one.contingency is None
                else figure(one.contingency),
                "effect": figure(one.effect),
                "half_width": figure(one.half_width),
                "reason": one.reason,
            }
            for one in rested.what_ifs
        ],
        "seeds": {
            "trials": rested.seeds.trials,
            "contingencies": [figure(c) for c in rested.seeds.contingencies],
            "below_issued": rested.seeds.below,
        },
        "break_level": f"P{rested.break_percent:02d}",
        "break_points": [
            {
                "id": point.id,
                "name": point.name,
                "kind": point.kind,
                "quantity": point.quantity,
                "now": figure(point.now),
                "breaks_at": None
                if point.breaks_at is None
                else figure(point.breaks_at),
                "furthest": figure(point.furthest),
                "level_there": point.level_there,
            }
            for point in rested.break_points
        ],
    }


def finding_object(finding: Finding) -> dict[str, Any]:
    """Return one finding as the contract has it."""
    answer = finding.answer
    return {
        "check": finding.check,
        "severity": finding.severity,
        "where": finding.where,
        "message": finding.message,
        "source": finding.source,
        "answer": None if answer is None else _answer(answer),
        "rows": list(finding.rows),
        "row_answers": [_answer(one) for one in finding.row_answers],
    }


def _answer(answer: Answer) -> dict[str, str]:
    return {
        "answer": answer.answer,
        "by": answer.by,
        "on": answer.on.isoformat(),
        "where": answer.where,
    }


def calibration_object(result: Calibration) -> dict[str, Any]:
    """Return the back-test of a history, ready for JSON."""
    return {
        "projects": [
            {
                "id": project.id,
                "name": project.name,
                "ratio": figure(project.ratio),
                "percent": figure(project.percent),
            }
            for project in result.projects
        ],
        "fit": _fit(result.fit),
        "levels": [
            {
                "level": f"P{record.percent:02d}",
                "enough": record.enough,
                "count": record.count,
                "interval": [figure(record.low), figure(record.high)],
            }
            for record in result.pictured
        ],
        "sentences": [record.sentence for record in result.funded],
    }


def _fit(fit: LognormalFit) -> dict[str, Any]:
    return {
        "count": fit.count,
        "log_mean": figure(fit.log_mean),
        "log_spread": figure(fit.log_spread),
        "percentiles": {
            f"P{percent:02d}": figure(fit.quantile(percent))
            for percent in (10, 50, 80, 90)
        },
    }


def _outside(study: Material) -> dict[str, Any] | None:
    """Return the outside view, ratios of final cost to base; None without one."""
    view = outside_view(study)
    if isinstance(view, str):
        return None
    return {
        "kind": view.kind,
        "source": view.source,
        "comparable": dict(
            zip(("stage", "money", "scope"), view.comparable, strict=True)
        ),
        "ratios": [figure(ratio) for ratio in view.ratios],
        "fit": None if view.fit is None else _fit(view.fit),
        "points": {f"P{percent:02d}": figure(at) for percent, at in view.points},
        "positions": [
            {
                "name": position.name,
                "amount": figure(position.amount),
                "ratio": figure(position.ratio),
                "percent": [
                    figure(position.low_percent),
                    figure(position.high_percent),
                ],
            }
            for position in view.positions
        ],
    }
