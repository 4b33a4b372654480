"""From a Study to the pages: every figure worded, every chart drawn.

Templates get one object, `Report`, and nothing else.  All of it is text, so that a
template can neither round nor add.
"""

from __future__ import annotations

import datetime as dt
import json
from dataclasses import dataclass

from contingency.assurance.events import FUNDED_EVENT, LARGE_EVENT
from contingency.assurance.settings import Settings
from contingency.report.charts import (
    Chart,
    allocation_picture,
    composition,
    driver_charts,
    total_charts,
)
from contingency.report.look import Colours, Look
from contingency.report.page_assurance import (
    AssurancePage,
    CautionsPage,
    CrossCheckPage,
    RecordPage,
    assurance_page,
    cautions_page,
    cross_check_page,
    record_page,
)
from contingency.report.page_evidence import EvidencePage, evidence_page
from contingency.report.page_front import (
    AnswerPage,
    TitlePage,
    TypedSignOff,
    answer_page,
    title_page,
)
from contingency.report.page_funding import FundingPage, funding_page
from contingency.report.page_inputs import InputsPage, inputs_page
from contingency.report.page_outside import OutsidePage, outside_page
from contingency.report.page_results import (
    AllocationPage,
    CoveragePage,
    DriversPage,
    ResultPage,
    SplitPage,
    allocation_page,
    coverage_page,
    drivers_page,
    result_page,
    split_page,
)
from contingency.report.page_revisions import (
    AccountPage,
    RevisionsPage,
    account_page,
    revisions_page,
)
from contingency.report.page_robustness import RobustnessPage, robustness_page
from contingency.report.page_scope import (
    BasePage,
    MethodPage,
    ScopePage,
    base_page,
    method_page,
    scope_page,
)
from contingency.report.wording import Amounts, date
from contingency.setting.coverage import event_coverage
from contingency.setting.printed import groups_of, printed_figures
from contingency.study import Study


@dataclass(frozen=True, kw_only=True, slots=True)
class Report:
    """Everything that the templates may show."""

    document_title: str
    author: str
    stamp: str
    """Date and time of the report for the PDF's own data, in UTC."""
    is_draft: bool
    colours: Colours
    title: TitlePage
    answer: AnswerPage
    scope: ScopePage
    base: BasePage
    method: MethodPage
    inputs: InputsPage
    evidence: EvidencePage
    result: ResultPage
    split: SplitPage
    allocation: AllocationPage
    funding: FundingPage | None
    drivers: DriversPage
    coverage: CoveragePage
    robustness: RobustnessPage | None
    outside: OutsidePage
    revisions: RevisionsPage
    account: AccountPage | None
    cross_checks: CrossCheckPage
    assurance: AssurancePage
    cautions: CautionsPage
    record: RecordPage


@dataclass(frozen=True, kw_only=True, slots=True)
class Pages:
    """The report's words and its pictures by name."""

    report: Report
    pictures: dict[str, bytes]


def make_pages(
    study: Study,
    look: Look,
    *,
    created: dt.datetime,
    draft: bool,
    files: dict[str, tuple[str, bytes]],
    typed: tuple[TypedSignOff, ...] = (),
) -> Pages:
    """Return the pages of a report.

    Parameters
    ----------
    created : datetime
        When the report is made, with its time zone.
    files : dict
        Name to what it is and its bytes, `results.json` among them.
    typed : tuple of TypedSignOff
        Sign-offs given by name, any order.
    """
    estimate = study.estimate
    step = estimate.contingency.rounding
    printed = printed_figures(
        study.allocation,
        study.second_opinion,
        study.levels,
        study.percentiles,
        step=step,
    )
    amounts = Amounts(currency=estimate.currency, step=step)
    settings = Settings(estimate.assurance)
    large = settings.number(LARGE_EVENT) / 100
    thin = settings.number(FUNDED_EVENT) / 100
    picture, note = allocation_picture(
        study, printed, groups_of(study.allocation), look
    )
    funding, funding_charts = funding_page(study, printed, amounts, look)
    robustness, robustness_charts = robustness_page(study, printed, amounts, look)
    outside, outside_charts = outside_page(study, printed, amounts, look)
    revisions, revisions_charts = revisions_page(study, amounts, look)
    account, account_charts = account_page(study, amounts, look)
    charts: dict[str, Chart] = {
        chart.name: chart
        for chart in (
            *total_charts(study, printed, look),
            composition(printed, amounts, look),
            picture,
            *driver_charts(study, printed, amounts, look),
            *funding_charts,
            *robustness_charts,
            *outside_charts,
            *revisions_charts,
            *account_charts,
        )
    }
    moment = created.astimezone(dt.UTC)
    tool = json.loads(files["results.json"][1])["tool"]
    report = Report(
        document_title=f"{estimate.project}: basis of contingency, "
        f"revision {estimate.revision}",
        author=estimate.owner,
        stamp=moment.strftime("%Y-%m-%dT%H:%M:%SZ"),
        is_draft=draft,
        colours=look.colours,
        title=title_page(
            study,
            draft=draft,
            issued_on=date(moment.date()),
            tool=f"{tool['name']} {tool['version']}",
            typed=typed,
        ),
        answer=answer_page(study, printed, amounts, charts["composition"]),
        scope=scope_page(estimate),
        base=base_page(study, printed, amounts),
        method=method_page(study),
        inputs=inputs_page(study, step=step),
        evidence=evidence_page(study),
        result=result_page(study, printed, amounts, charts),
        split=split_page(study, printed, amounts),
        allocation=allocation_page(study, printed, amounts, picture, note),
        funding=funding,
        drivers=drivers_page(study, amounts, charts),
        coverage=coverage_page(
            study,
            event_coverage(
                estimate,
                study.drivers,
                contingency=study.target.contingency,
                large=large,
                thin=thin,
            ),
            amounts,
            large=large,
            thin=thin,
        ),
        robustness=robustness,
        outside=outside,
        revisions=revisions,
        account=account,
        # Small differences are the point here: whole units, not the report's steps.
        cross_checks=cross_check_page(
            study, Amounts(currency=estimate.currency, step=min(step, 1.0))
        ),
        assurance=assurance_page(study),
        cautions=cautions_page(study),
        record=record_page(study, files),
    )
    return Pages(
        report=report,
        pictures={name: chart.drawing.svg for name, chart in charts.items()},
    )
