"""The page context: golden, complete, and used to the last field."""

import dataclasses
import datetime as dt
import json
import re
from pathlib import Path

import pytest
from jinja2 import nodes

from contingency.estimate.nouns import (
    ContingencyRule,
    CostRange,
    PairCorrelation,
    Statements,
)
from contingency.report.folder import ENTRY, render_html, sandbox, templates_folder
from contingency.report.page_front import sign_off_rows
from contingency.report.page_inputs import entered_step
from contingency.report.pages import Report, make_pages
from contingency.report.wording import currency_amount
from contingency.results import as_json
from contingency.study import run_study
from contingency.tracking.families import Family
from contingency.verify.printed import check_printed, figures_to_print
from tests.report.closed_refits import beside_others
from tests.report.conftest import CREATED
from tests.report.funded_refit import funded
from tests.report.second_revision import second_revision
from tests.report.ship_refit import ship_refit, with_fixed_findings

FOLDER = templates_folder()


def pages_of(study, look, *, draft=True):
    """The pages of a study with its results as the only file."""
    files = {"results.json": ("Results", as_json(study.results()))}
    return make_pages(study, look, created=CREATED, draft=draft, files=files)


def bare():
    """One fixed package and nothing else: every part of a page that may be empty."""
    refit = ship_refit()
    package = refit.packages[0].model_copy(
        update={
            "cost": CostRange(shape="fixed", likely=2_150_000.0),
            "loads": (),
            "group": "",
        }
    )
    return refit.model_copy(
        update={
            "packages": (package,),
            "systemic": (),
            "events": (),
            "causes": (),
            "statements": Statements(),
            "sign_offs": (),
            "answers": (),
            "gate": "",
            "previous": "",
            "contingency": ContingencyRule(target=80),
        }
    )


def correlated():
    """Correlations in place of causes, and every shape there is."""
    refit = ship_refit()
    shapes = {
        "H100": CostRange(shape="triangular", low=2e6, likely=2.15e6, high=2.6e6),
        "H110": CostRange(shape="uniform", low=3e6, high=4.4e6),
        "H120": CostRange(
            shape="normal", low=1e6, high=1.5e6, ends=refit.packages[0].cost.ends
        ),
        "H130": CostRange(
            shape="lognormal", low=3.9e6, high=4.9e6, ends=refit.packages[0].cost.ends
        ),
        "H140": CostRange(
            shape="discrete",
            outcomes=((0.9e6, 0.4), (1.3e6, 0.6)),
            written=("", "", "", "900000:0.4; 1300000:0.6"),
        ),
        "M200": CostRange(
            shape="points",
            outcomes=((5.0, 8.6e6), (50.0, 8.9e6), (95.0, 9.9e6)),
            written=("", "", "", "P05=8600000; P50=8900000; P95=9900000"),
        ),
    }
    return refit.model_copy(
        update={
            "packages": tuple(
                p.model_copy(update={"loads": (), "cost": shapes.get(p.id, p.cost)})
                for p in refit.packages
            ),
            "causes": (),
            "general_dependence": None,
            "correlations": (
                PairCorrelation(a="H100", b="H110", correlation=0.9, line=2),
                PairCorrelation(a="H110", b="H120", correlation=0.9, line=3),
                PairCorrelation(a="H100", b="H120", correlation=-0.6, line=4),
            ),
        }
    )


@pytest.fixture(scope="module")
def studies(refit):
    """Studies that between them fill every part of every page."""
    return [
        with_fixed_findings(refit),
        run_study(bare()),
        run_study(correlated()),
        run_study(beside_others()),
        run_study(funded()),
        second_revision(),
        run_study(released(refit.estimate)),
    ]


def test_the_context_of_the_refit_is_the_golden_one(refit, look, golden):
    """Every word and every figure that the templates may show."""
    results = {
        "tool": {"name": "contingency", "version": "1.2.3"},
        "run": {"method": "contingency-method/2"},
    }
    files = {
        "packages.csv": ("Input file of the estimate", b"id,name\n"),
        "results.json": ("Results, unrounded", json.dumps(results).encode()),
    }
    pages = make_pages(
        with_fixed_findings(refit), look, created=CREATED, draft=True, files=files
    )
    report = dataclasses.asdict(pages.report)
    text = json.dumps(report, indent=1, ensure_ascii=False) + "\n"

    golden(text, "ship_refit/context.json")


def test_a_context_holds_words_and_no_numbers(refit, look):
    """So a template has nothing to round or to add up."""

    def leaves(value):
        if isinstance(value, dict):
            for inner in value.values():
                yield from leaves(inner)
        elif isinstance(value, list | tuple):
            for inner in value:
                yield from leaves(inner)
        else:
            yield value

    report = dataclasses.asdict(pages_of(refit, look).report)

    assert {type(leaf) for leaf in leaves(report)} <= {str, bool, type(None)}


def contexts():
    """Every dataclass of the page context, found through the fields of `Report`."""
    found, waiting = set(), [Report]
    modules = {}
    while waiting:
        one = waiting.pop()
        if one in found:
            continue
        found.add(one)
        modules.update(vars(__import__(one.__module__, fromlist=["x"])))
        for field in dataclasses.fields(one):
            for name in str(field.type).replace("[", " ").replace("]", " ").split():
                kind = modules.get(name.strip(",."))
                if dataclasses.is_dataclass(kind):
                    waiting.append(kind)
    return found


def test_templates_use_exactly_the_fields_of_the_context(studies, look):
    """No field is made for nothing, and none is asked for that there is not."""
    environment = sandbox(FOLDER)
    plain, used = environment.getattr, set()

    def noted(thing, name):
        if dataclasses.is_dataclass(thing):
            used.add((type(thing).__name__, name))
        return plain(thing, name)

    environment.getattr = noted
    for study in studies:
        for draft in (True, False):
            pages = pages_of(study, look, draft=draft)
            environment.get_template(ENTRY).render(report=pages.report)
    there = {
        (one.__name__, field.name)
        for one in contexts()
        for field in dataclasses.fields(one)
    }

    assert used - there == set(), "asked for and not there"
    assert there - used == EXPLAINED, "there and never asked for"


EXPLAINED = {
    # Charts are drawn with these two; the style sheet has no use for them.
    ("Colours", "pale"),
    ("Colours", "draft"),
}


def test_templates_do_no_arithmetic():
    """No sum, product, rounding or counting of anything that is printed."""
    environment = sandbox(FOLDER)
    allowed_filters = {"length"}
    arithmetic = (
        nodes.Add,
        nodes.Sub,
        nodes.Mul,
        nodes.Div,
        nodes.FloorDiv,
        nodes.Mod,
        nodes.Pow,
    )
    for path in sorted(FOLDER.glob("*.html")):
        tree = environment.parse(path.read_text(encoding="utf-8"))
        assert not list(tree.find_all(arithmetic)), path.name
        filters = {one.name for one in tree.find_all(nodes.Filter)}
        assert filters <= allowed_filters, path.name


def test_every_template_is_included_once():
    """A page that nobody includes would never be seen to be wrong."""
    text = (FOLDER / ENTRY).read_text(encoding="utf-8")
    pages = {path.name for path in FOLDER.glob("*.html")} - {ENTRY}

    for name in pages:
        assert text.count(f'{{% include "{name}" %}}') == 1, name


def test_contents_name_every_chapter_in_order():
    """With the words of its heading, and a link that leads to it."""
    contents = (FOLDER / "contents.html").read_text(encoding="utf-8")
    contents, aside = contents.split("</ol>")
    links = re.findall(r'<a href="#([\w-]+)">([^<]+)</a>', contents)
    included = re.findall(
        r'include "([\w-]+\.html)"', (FOLDER / ENTRY).read_text(encoding="utf-8")
    )
    headings = []
    for name in included:
        text = (FOLDER / name).read_text(encoding="utf-8")
        headings += re.findall(r'<h1[^>]* id="([\w-]+)">([^<]+)</h1>', text)
    headings = [pair for pair in headings if pair[0] != "contents"]

    assert [anchor for anchor, _ in links] == [anchor for anchor, _ in headings]
    for (_, link), (_, heading) in zip(links, headings, strict=True):
        assert heading.startswith(link), link
    ids = {anchor for anchor, _ in headings}
    assert set(re.findall(r'href="#([\w-]+)"', aside)) <= ids


def test_what_is_typed_cannot_become_markup(refit, look):
    """A name with angle brackets is shown as it is written."""
    estimate = ship_refit().model_copy(
        update={"project": 'Refit <b onclick="x">&amp;</b> {{ 7 * 7 }} \x3cscript\x3e'}
    )
    study = dataclasses.replace(refit, estimate=estimate)
    text = render_html(pages_of(study, look).report, FOLDER)

    assert "<script" not in text
    assert "<b onclick" not in text
    assert "{{ 7 * 7 }}" in text


@pytest.mark.parametrize(
    ("roles", "fields"),
    [
        ((), ["sig_prepared", "sig_checked", "sig_approved"]),
        (
            ("prepared", "risk owner", "checked", "approved", "approved"),
            [
                "sig_prepared",
                "sig_risk_owner",
                "sig_checked",
                "sig_approved",
                "sig_approved_2",
            ],
        ),
    ],
)
def test_every_role_has_a_field_of_its_own(roles, fields):
    """Also the roles that every report needs and nobody named."""
    from contingency.estimate.nouns import SignOffLine

    rows = sign_off_rows(tuple(SignOffLine(role=role) for role in roles))

    assert [row.field for row in rows] == fields


@pytest.mark.parametrize(
    ("base", "step", "entered"),
    [
        (2_150_000.0, 1000.0, 1000.0),
        (2_150_000.0, 100_000.0, 1000.0),
        (2_150_500.0, 1000.0, 100.0),
        (2_150_501.0, 1000.0, 1.0),
        (2_150_501.25, 1000.0, 0.01),
        (2_150_000.0, 1.0, 1.0),
    ],
)
def test_inputs_are_shown_as_exactly_as_they_were_entered(base, step, entered):
    """However coarsely the results are rounded."""
    refit = ship_refit()
    package = refit.packages[0].model_copy(update={"base": base})
    estimate = refit.model_copy(update={"packages": (package,), "events": ()})

    assert entered_step(estimate, step) == entered


def test_the_worst_cautions_come_first(refit, look):
    """Stops before majors before cautions, open before answered; never a note."""
    pages = pages_of(with_fixed_findings(refit), look)
    marks = [one.mark for one in pages.report.answer.cautions]
    none = dataclasses.replace(refit, findings=())
    stated = [one.mark for one in pages_of(none, look).report.answer.cautions]

    assert marks == ["Stop", "Major", "Major, answered"]
    assert stated == ["Stated", "Stated"]


def test_a_level_that_is_not_known_comes_before_doubts_about_it(refit, look):
    """Among the open majors, whichever stands first in the list of checks."""
    known = with_fixed_findings(refit)
    major = next(one for one in known.findings if one.needs_attention)
    major = dataclasses.replace(major, severity="major", message="A doubt.")
    unsettled = dataclasses.replace(
        major, check="unsettled-percentile", message="P80 is not settled."
    )
    study = dataclasses.replace(refit, findings=(major, unsettled))
    words = [one.words for one in pages_of(study, look).report.answer.cautions]

    assert words[:2] == ["P80 is not settled.", "A doubt."]


def test_no_machine_path_reaches_the_context(refit, look):
    """The report is the same wherever it is made."""
    report = json.dumps(dataclasses.asdict(pages_of(refit, look).report))

    assert str(Path.cwd()) not in report


def test_the_answer_says_what_moved_since_the_revision_before(look):
    """With the level apart; base and contingency add up to the total, as printed."""
    study = second_revision()
    words = pages_of(study, look).report.answer.since
    figures = re.findall(r"[+−][\d,]+|(?<= )0(?=[ ,])", words)
    base, contingency, level, total = (
        int(one.replace(",", "").replace("−", "-")) for one in figures
    )
    bridge = study.comparison.bridge
    printed = study.comparison.printed(1000.0)

    assert words.startswith("Since revision B: base ")
    assert words.endswith("(GBP\xa0thousand; each in money of its own price date).")
    assert total == base + contingency
    assert base == sum(step.base for step in printed) / 1000
    assert contingency == sum(step.contingency for step in printed) / 1000
    assert level == pytest.approx(bridge.step(Family.LEVEL).contingency / 1000, abs=1)


def test_a_first_revision_has_moved_nothing(refit, look):
    """The line is left out."""
    assert pages_of(refit, look).report.answer.since == ""


@pytest.mark.parametrize(
    ("previous", "words"),
    [("../rev-b", "rev-b"), ("..\\rev-b\\", "rev-b"), ("", "–")],
)
def test_the_cover_names_the_revision_before(refit, look, previous, words):
    """By its letter; by its folder's name where it was not read; never by a path."""
    facts = pages_of(second_revision(), look).report.title.facts
    estimate = refit.estimate.model_copy(update={"previous": previous})
    unread = dataclasses.replace(refit, estimate=estimate)
    others = pages_of(unread, look).report.title.facts

    assert {f.name: f.words for f in facts}["Previous revision"] == "B"
    assert {f.name: f.words for f in others}["Previous revision"] == words


def released(refit):
    """The refit with a base that is far too high for its ranges."""
    first, *others = refit.packages
    high = first.model_copy(update={"base": first.base + 40e6})
    return refit.model_copy(update={"packages": (high, *others)})


def test_a_level_below_the_base_is_told_as_a_release(look):
    """Nothing is asked for, and there are no shares of what is not there."""
    study = run_study(released(ship_refit()))
    report = pages_of(study, look).report
    below = currency_amount("GBP", -round(study.target.contingency, -3))
    text = " ".join(re.sub("<[^>]+>", " ", render_html(report, FOLDER)).split())

    assert study.target.contingency < 0
    assert report.answer.release == f"{below} below the base"
    assert f"P80 lies {' '.join(below.split())} below the base of GBP" in text
    assert "nothing is asked for above it" in text
    assert "A contingency of" not in text
    assert {row.share for row in report.split.rows} == {"–"}
    assert not report.coverage.has_contingency
    assert "No threat costs more" not in text
    check = check_printed(
        [f"{text} {report.answer.chart_alt}"],
        figures_to_print(study.results(), currency="GBP", step=1000.0),
    )
    assert check.holds, check.missing


def test_what_is_entered_beside_a_range_stands_in_the_notes(refit, look):
    """Of packages and of events: every optional cell that no column shows."""
    day = dt.date(2030, 6, 30)
    estimate = refit.estimate
    package = estimate.packages[0].model_copy(
        update={
            "progress": 0.4,
            "price_basis": "outturn",
            "price_date": day,
            "holds_allowance": True,
        }
    )
    shared = estimate.events[0].model_copy(
        update={
            "contract": "shared",
            "retained_share": 0.25,
            "clause": "cl. 61",
            "in_scope": True,
            "reviewed_on": day,
            "next_review": day.replace(year=2031),
        }
    )
    outside = estimate.events[1].model_copy(
        update={"contract": None, "clause": "cl. 7", "in_scope": False}
    )
    changed = estimate.model_copy(
        update={
            "packages": (package, *estimate.packages[1:]),
            "events": (shared, outside, *estimate.events[2:]),
        }
    )
    study = dataclasses.replace(refit, estimate=changed)
    page = pages_of(study, look).report.inputs
    said = page.packages[0].rows[0].notes.replace("\xa0", " ")
    first, second = (event.notes.replace("\xa0", " ") for event in page.events[:2])
    plain = pages_of(refit, look).report.inputs.packages[0].rows[0].notes

    assert "Work done: 40 %." in said
    assert "Prices: outturn money of 30 June 2030." in said
    assert "The base holds an allowance for risk." in said
    assert "By contract shared, 25 % retained (cl. 61)." in first
    assert "Inside the approved scope." in first
    assert "Reviewed on 30 June 2030, next review 30 June 2031." in first
    assert "Contract: cl. 7." in second
    assert "Outside the approved scope." in second
    assert "allowance" not in plain
    assert "Prices" not in plain


def test_covered_is_explained_where_an_event_can_happen_repeatedly(refit, look):
    """One occurrence against all of them; not said where it would only puzzle."""
    said = "mean cost is that of one occurrence"
    repeated = [e for e in refit.estimate.open_events if e.happens == "repeatedly"]
    report = pages_of(refit, look).report
    other = pages_of(run_study(bare()), look).report

    assert repeated
    assert said in render_html(report, FOLDER)
    assert said not in render_html(other, FOLDER)


def test_the_base_is_listed_by_what_the_packages_name(studies, look):
    """By group, or by package where none names a group; nothing is counted then."""
    grouped, bare = (pages_of(studies[i], look).report for i in (0, 1))
    by_group, by_package = grouped.base, bare.base
    html = render_html(bare, FOLDER)

    assert by_group.grouped_by == "group or package"
    assert by_package.grouped_by == "package"
    table = html[html.index('id="base"') :].split("</table>")[0]
    assert ">Package</th>" in table
    assert ">Packages</th>" not in table
