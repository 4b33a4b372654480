"""The guide to the report follows the report, and quotes its figures."""

import re
from pathlib import Path

import pytest

from contingency.assurance.outside_view import outside_view
from contingency.estimate.reading import read_estimate
from contingency.study import run_study

ROOT = Path(__file__).parents[1]
GUIDE = (ROOT / "docs" / "reading-the-report.md").read_text(encoding="utf-8")
TEMPLATES = ROOT / "report_templates"
EXAMPLE = ROOT / "example_estimates" / "island-power-link" / "rev-c"


@pytest.fixture(scope="module")
def study():
    """The whole job for the example that the guide quotes."""
    return run_study(read_estimate(EXAMPLE))


def chapters():
    """Headings of the templates in the order in which the report includes them."""
    report = (TEMPLATES / "report.html").read_text(encoding="utf-8")
    found = []
    for name in re.findall(r'{% include "([\w-]+\.html)" %}', report):
        text = (TEMPLATES / name).read_text(encoding="utf-8")
        found += re.findall(r"<h1[^>]*>([^<{]+)</h1>", text)
    return found


def test_the_guide_has_a_section_for_every_chapter_in_order():
    """And for no chapter that the report does not have."""
    sections = re.findall(r"^## (.+)$", GUIDE, re.MULTILINE)

    assert sections == ["Which pages for whom", "Title page", *chapters()]


def test_the_guide_quotes_the_figures_of_the_example(study):
    """Every quotation in italics with a figure in it, from the unrounded results.

    A total is the printed base plus the printed rest, as everywhere in the report.
    """
    million = 1e6
    target = study.target
    base = study.estimate.base / million

    def as_printed(amount):
        return round(base, 1) + round(amount / million - base, 1)

    total = as_printed(target.total)
    rare = next(d for d in study.drivers if d.id == "E03")
    event = next(e for e in study.estimate.events if e.id == "E03")
    cost = event.impact_used.distribution.mean
    held = rare.removal_effect

    asked = (
        f"EUR {target.contingency / million:.1f} million on a base of"
        f" EUR {study.estimate.base / million:.1f} million, a request of"
        f" EUR {total:.1f} million at P80; the contingency is"
        f" {target.percent_of_base:.1f} % of the base."
    )
    enough = f"{100 * study.chance_base_is_enough:.1f} %"
    p10, p90 = (as_printed(study.percentiles[percent - 1]) for percent in (10, 90))
    middle = f"{p10:.1f} to {p90:.1f} million"
    unpaid = (
        f"Event E03 would cost EUR {cost / million:.1f} million; P80 holds"
        f" EUR {held / million:.1f} million of it, {100 * held / cost:.0f} %."
    )

    rested = study.robustness
    changed = {one.slug: one.contingency / million for one in rested.what_ifs}
    otherwise = (
        f"With no systemic risks the contingency would be EUR"
        f" {changed['no-systemic-risks']:.1f} million, with every range as if its ends"
        f" were P20 and P80 EUR {changed['ends-at-fifths']:.1f} million."
    )
    seeds = f"It lies above {rested.seeds.below} of them."
    breaks = next(one for one in rested.break_points if one.id == "E03")
    rises = (
        f"The chance of E03 would have to rise from {100 * breaks.now:.0f} % to"
        f" {100 * breaks.breaks_at:.0f} %."
    )
    beside = outside_view(study).positions[-1].low_percent
    outside = (
        "The closed projects, taken alone, give the request a chance of"
        f" {beside:.1f} %."
    )

    quoted = re.findall(r"\*([^*]*\d[^*]*)\*", GUIDE)

    assert quoted == [
        asked,
        enough,
        middle,
        unpaid,
        otherwise,
        seeds,
        rises,
        outside,
    ]
