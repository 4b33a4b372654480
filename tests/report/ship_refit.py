"""An invented estimate for tests of the report: the refit of a research vessel.

Nothing here is a real project, and every figure is made up.  The rows are long
enough, and odd enough, to try every part of a page.
"""
# ruff: noqa: E501  (rows of a table stay rows)

import dataclasses
import datetime as dt

from contingency.assurance.findings import CheckOutcome, Finding
from contingency.estimate.nouns import (
    Answer,
    Assumption,
    CommonCause,
    ContingencyRule,
    CostRange,
    Ends,
    Estimate,
    Evidence,
    Exclusion,
    Level,
    Load,
    PackageShare,
    RiskEvent,
    Run,
    SignOffLine,
    SourceFile,
    Statements,
    SystemicRisk,
    WorkPackage,
)

ENDS = Ends(low_percent=10, high_percent=90)
DAY = dt.date(2031, 4, 30)

# Columns: id, name, group, base, low %, likely %, high %, loads, basis, kind
PACKAGES = """
H100|Docking, staging and survey|Hull and living quarters|2150000|92|100|122|labour:0.5|Three yard quotations of March 2031|data
H110|Shell plating renewal|Hull and living quarters|3480000|88|102|145|labour:0.5; growth:0.5|Thickness survey of 2030, growth on four sister ships|analogue
H120|Tank coating|Hull and living quarters|1260000|90|100|130|labour:0.5; growth:0.4|Rates of the last two dockings|data
H130|Cabin modules|Hull and living quarters|4120000|94|100|116|labour:0.3|Supplier's offer, drawings at 60 %|data
H140|Galley and mess refit|Hull and living quarters|980000|90|100|125|labour:0.3|Outfitting lead, workshop of 14 April|judgement
M200|Main engines, two off|Propulsion and power|8900000|97|100|108||Firm offer, valid to August|data
M210|Gearboxes and shafts|Propulsion and power|2640000|95|100|118|growth:0.3|Offer; alignment from two earlier refits|analogue
M220|Battery bank and converters|Propulsion and power|5750000|85|98|135||Two budget prices and the trend of cell prices|data
M230|Switchboards|Propulsion and power|1870000|92|100|126|labour:0.3|Single line diagram not frozen|judgement
M240|Cable pulling and termination|Propulsion and power|2310000|85|105|160|labour:0.6; growth:0.3|Cable list 40 % complete; metres per hour of three ships|analogue
M250|Exhaust treatment|Propulsion and power|1420000|93|100|120||Supplier's offer|data
D300|Stern frame|Deck and handling|3050000|90|100|128|labour:0.4|Steel weight estimate of concept C|judgement
D310|Oceanographic winches|Deck and handling|4680000|94|100|121||Offers of two makers|data
D320|Deck crane|Deck and handling|1930000|96|100|112||Catalogue price and foundation|data
D330|Launch and recovery cradle for autonomous vehicles of two makers|Deck and handling|1150000|80|100|165||No reference; concept only|judgement
S400|Multibeam echo sounder|Science outfit|6300000|97|100|109||Framework contract|data
S410|Drop keels|Science outfit|2870000|88|100|135|labour:0.4; growth:0.3|One earlier ship|analogue
S420|Clean laboratory modules|Science outfit|2240000|92|100|124||Offer, scope under discussion|data
S430|Scientific sea water system|Science outfit|760000|90|100|130|labour:0.3|Rates per metre|judgement
T500|Harbour trials|Trials and handover|640000|90|100|140|labour:0.5|Trials lead|judgement
T510|Sea trials|Trials and handover|1580000|85|100|155||Days at sea of five refits|data
T520|Noise ranging|Trials and handover|890000|95|100|125||Range tariff 2031|data
W600|Owner's team at the yard||3360000|90|104|138||Team plan at 34 months|judgement
W610|Class and flag fees||1120000|100|100|100||Fixed fee agreed|data
"""

# Columns: id, name, low, likely, high, applies_to, basis, kind.
SYSTEMIC = """
Y1|Definition of the work at contract|-2|3|11|all|Rating of 18 criteria by the review panel|analogue
Y2|Productivity and shift pattern of the yard|-3|2|9|Hull and living quarters; Propulsion and power; Deck and handling|Five refits of the last ten years|data
Y3|Integration of systems that are new to the ship|0|2|8|Propulsion and power; Science outfit|Panel of 14 April|judgement
Y4|Pace of the owner's decisions|0|1.5|6|W600; Trials and handover|Own record of approvals, 2026 to 2030|data
"""

# Columns: id, name, kind, chance, low, likely, high (thousand), shares, owner, basis, kind
EVENTS = """
R01|Corrosion behind the linings beyond the survey|threat|0.35|250|700|2400|H110:60; H120:40|Hull lead|Survey report, section 6|analogue
R02|Main engines arrive after the dock is flooded|threat|0.20|400|900|1900|M200:70; H100:30|Machinery lead|Maker's delivery record|data
R03|Dock slot given to another ship|threat|0.10|600|1100|2600|H100:100|Contract manager|Yard's order book|judgement
R04|Radiated noise above the limit at first ranging|threat|0.30|300|800|2100|S410:50; M210:50|Trials lead|Two of six ships of this kind|analogue
R05|Battery room not accepted by class as drawn|threat|0.25|200|500|1400|M220:100|Machinery lead|Discussion with class, February|judgement
R06|Fire on board during hot work|threat|0.008|6000|11000|19000||Sponsor|Insurer's statistics for ships under repair|data
R07|Winch maker fails|threat|0.04|900|1800|3600|D310:100|Contract manager|Credit report|judgement
R08|Asbestos in bulkheads thought to be clear|threat|0.22|120|300|850|H130:70; H140:30|Hull lead|Age of the ship and the inventory of 2019|analogue
R09|Work on two decks stopped by the asbestos finding|threat|0.40|350|800|1700||Contract manager|Two earlier cases|analogue
R10|Winches fail the acceptance test|threat|0.18|150|350|900|D310:100|Deck lead|Supplier's record|data
R11|Strike at the yard|threat|0.07|300|700|1600||Contract manager|Last twenty years|data
R12|Welds rejected and made again|threat|3.5|30|70|160|H110:50; D300:30; S410:20|Hull lead|Yard's own statistics|data
R13|Sea trials lost to autumn weather|threat|0.25|180|340|720|T510:100|Trials lead|Weather records|data
R14|Sea trials moved to the next spring|threat|0.10|700|1200|2300|T510:60; W600:40|Trials lead|Planning, case 3|judgement
R15|Docking shared with the sister ship|opportunity|0.35|150|320|600|H100:100|Contract manager|Letter of the sister institute|judgement
R16|Old engines sold to a museum harbour|opportunity|0.50|60|140|260|M200:100|Machinery lead|Enquiry of January|judgement
R17|Cabin supplier withdraws|threat|0.10|200|400|900|H130:100|Hull lead|Closed: contract signed in March 2031|data
R18|Sonar window cracked in survey|threat|1|150|210|300|S400:100|Science lead|Occurred in February 2031; in the forecast|data
"""


def _rows(text):
    return [line.split("|") for line in text.strip().splitlines()]


def _evidence(basis, kind, who):
    return Evidence(basis=basis, kind=kind, given_by=who, given_on=DAY)


def _package(line, row):
    id_, name, group, base, low, likely, high, loads, basis, kind = row
    base = float(base)
    fixed = low == likely == high
    cost = CostRange(
        shape="fixed" if fixed else "pert",
        low=None if fixed else base * float(low) / 100,
        likely=base * float(likely) / 100,
        high=None if fixed else base * float(high) / 100,
        ends=Ends() if fixed else ENDS,
        written=("", "", "", "")
        if fixed
        else (f"{low}%", f"{likely}%" if likely != "100" else "", f"{high}%", ""),
    )
    pairs = [pair.split(":") for pair in loads.split("; ") if pair]
    return WorkPackage(
        id=id_,
        name=name,
        group=group,
        base=base,
        cost=cost,
        loads=tuple(Load(cause=cause, weight=float(w)) for cause, w in pairs),
        evidence=_evidence(basis, kind, "Cost lead"),
        spent=420_000.0 if id_ == "S400" else None,
        line=line,
    )


def _systemic(line, row, packages):
    id_, name, low, likely, high, applies_to, basis, kind = row
    words = tuple(word.strip() for word in applies_to.split(";"))
    return SystemicRisk(
        id=id_,
        name=name,
        uplift=CostRange(
            shape="pert",
            low=float(low) / 100,
            likely=float(likely) / 100,
            high=float(high) / 100,
            ends=ENDS,
            written=(f"{low}%", f"{likely}%", f"{high}%", ""),
        ),
        packages=tuple(p.id for p in packages if {"all", p.group, p.id} & set(words)),
        applies_to=words,
        evidence=_evidence(basis, kind, "Review panel"),
        line=line,
    )


MORE = {
    "R01": {"response": "Open two trial areas before dock", "response_cost": 60_000.0},
    "R02": {
        "response": "Expediter at the maker from June",
        "response_cost": 85_000.0,
        "response_package": "W600",
        "after": (0.12, 300, 700, 1500),
        "use": "after",
        "response_due": dt.date(2031, 9, 30),
        "response_owner": "Machinery lead",
    },
    "R05": {
        "response": "Approval in principle before order",
        "response_cost": 40_000.0,
        "response_package": "M220",
        "after": (0.10, 150, 350, 900),
        "use": "after",
    },
    "R06": {"held_by": "Institute's insurance, excess with the sponsor"},
    "R09": {"requires": "R08"},
    "R13": {"excludes": ("R14",)},
    "R14": {"excludes": ("R13",)},
    "R17": {"status": "closed"},
    "R18": {"status": "occurred"},
}


def _event(line, row):
    id_, name, kind, chance, low, likely, high, shares, owner, basis, basis_kind = row
    more = dict(MORE.get(id_, {}))
    repeated = id_ == "R12"
    after = more.pop("after", None)
    if after:
        more["after_probability"] = after[0]
        more["after_impact"] = _impact(*after[1:])
    pairs = [pair.split(":") for pair in shares.split("; ") if pair]
    return RiskEvent(
        id=id_,
        name=name,
        kind=kind,
        happens="repeatedly" if repeated else "once",
        probability=None if repeated else float(chance),
        frequency=float(chance) if repeated else None,
        impact=_impact(low, likely, high),
        shares=tuple(PackageShare(package=p, fraction=float(f) / 100) for p, f in pairs)
        or (PackageShare(package="project-wide", fraction=1.0),),
        owner=owner,
        window_start=dt.date(2031, 9, 1),
        window_finish=dt.date(2033, 2, 28),
        evidence=_evidence(basis, basis_kind, owner),
        line=line,
        **more,
    )


def _impact(low, likely, high):
    low, likely, high = (float(x) * 1000 for x in (low, likely, high))
    return CostRange(
        shape="pert",
        low=low,
        likely=likely,
        high=high,
        ends=ENDS,
        written=(f"{low:.0f}", f"{likely:.0f}", f"{high:.0f}", ""),
    )


STATEMENTS = Statements(
    scope="Refit of the research vessel Halcyon at one yard: new propulsion, a battery "
    "bank, new handling gear aft, new sonars on drop keels, renewed living quarters. "
    "From contract to acceptance after noise ranging.",
    base="Estimate of April 2031 in the ninth work breakdown, priced from quotations "
    "(61 % of the amount), framework contracts (14 %) and own rates. Drawings are at "
    "60 %. All allowances for growth of work were taken out and are in the ranges.",
    assumptions=(
        Assumption(
            id="A1",
            text="The ship is free for 17 months from September 2031.",
            holder="Head of fleet",
            expires=dt.date(2031, 8, 31),
            effect="Each month later costs about 0.2 million for the owner's team.",
        ),
        Assumption(
            id="A2",
            text="One yard does all the work; no move between docks.",
            holder="Contract manager",
        ),
        Assumption(
            id="A3",
            text="Class accepts the noise limit as a contract matter, not a rule.",
            holder="Machinery lead",
            expires=dt.date(2031, 12, 31),
        ),
    ),
    exclusions=(
        Exclusion(
            id="X1",
            text="Charter of another ship during the refit.",
            carried_by="Ministry's ship time fund",
            size="3.5 to 5 million",
        ),
        Exclusion(
            id="X2",
            text="Growth of prices after the price date.",
            carried_by="Escalation line of the budget",
        ),
        Exclusion(id="X3", text="Change of the science programme."),
    ),
    cautions=(
        "The cable list is 40 % complete; its range is the least well founded.",
        "No ship with this battery arrangement has been delivered yet.",
    ),
)

ANSWERS = (
    Answer(
        check="rare-large-events",
        where="R06",
        answer="The builder's risk policy pays above an excess of 0.5 million; the "
        "excess is held by the sponsor.",
        by="M. Okafor, risk manager",
        on=dt.date(2031, 5, 12),
    ),
)


def ship_refit():
    """The estimate as if it had been read from a folder."""
    packages = tuple(
        _package(line, row) for line, row in enumerate(_rows(PACKAGES), start=2)
    )
    return Estimate(
        project="Refit of the research vessel Halcyon",
        revision="C",
        previous="../rev-b",
        gate="Gate 3: full funding",
        estimate_class=3,
        currency="GBP",
        price_date=dt.date(2031, 3, 31),
        data_date=DAY,
        owner="Institute of Northern Seas",
        contingency=ContingencyRule(
            target=80,
            set_by="Capital approvals policy, section 4",
            reason="The ship has no other source of money once the dock is flooded.",
            rounding=1000,
            levels=(
                Level(percent=50, purpose="Delivery target", holder="Project manager"),
                Level(percent=80, purpose="Approved funding", holder="Sponsor"),
                Level(
                    percent=90, purpose="Reserve ceiling", holder="Investment committee"
                ),
            ),
        ),
        ends=ENDS,
        general_dependence=0.15,
        run=Run(seed=20310430, tolerance=0.005, least=8192, most=65536),
        statements=STATEMENTS,
        sign_offs=(
            SignOffLine(role="prepared", name="A. Lindqvist", position="Cost engineer"),
            SignOffLine(role="checked", name="D. Achterberg", position="Head of cost"),
            SignOffLine(role="approved", name="R. Mbeki", position="Sponsor"),
        ),
        answers=ANSWERS,
        packages=packages,
        systemic=tuple(
            _systemic(line, row, packages)
            for line, row in enumerate(_rows(SYSTEMIC), start=2)
        ),
        events=tuple(_event(line, row) for line, row in enumerate(_rows(EVENTS), 2)),
        causes=(
            CommonCause(
                id="labour",
                name="Yard labour rate and output",
                basis="Hours and rates of five refits, 2021 to 2030",
                line=2,
            ),
            CommonCause(
                id="growth",
                name="Growth of work once the ship is opened",
                basis="Growth of steel and pipe work on four sister ships",
                line=3,
            ),
        ),
        sources=(
            SourceFile(name="causes.csv", content=b"id,name,basis\n"),
            SourceFile(name="estimate.toml", content=b"[estimate]\n"),
            SourceFile(name="events.csv", content=EVENTS.encode()),
            SourceFile(name="packages.csv", content=PACKAGES.encode()),
            SourceFile(name="systemic.csv", content=SYSTEMIC.encode()),
        ),
        fingerprint="3f9a6c2e7b1d4085a6e2c9174d0b8f53e1a7c6429d5b0f8e3c7a1d6924b8e05f",
    )


FINDINGS = (
    Finding(
        check="rare-large-events",
        severity="major",
        where="R06",
        message="if R06 happens it costs 12.3 million; P80 holds 0.1 million of that.",
        todo="Decide who holds the rest.",
        source="a guide that was read [passage read]",
        answer=ANSWERS[0],
    ),
    Finding(
        check="ranges-without-evidence",
        severity="major",
        where="",
        message="Two ranges have no reference: D330, S430.",
        todo="Name a source.",
        source="common practice, no source",
        rows=("D330", "S430"),
        row_answers=(
            Answer(
                check="ranges-without-evidence",
                where="S430",
                answer="Rates of the last ship.",
                by="Science lead",
                on=DAY,
            ),
        ),
    ),
    Finding(
        check="no-scope",
        severity="stop",
        where="",
        message="Something stands in the way",
        todo="Take it away.",
        source="common practice, no source",
    ),
    Finding(
        check="copied-ranges",
        severity="caution",
        where="",
        message="five packages share a range",
        todo="Say what makes them equally uncertain.",
        source="a guide that was read [passage read]",
    ),
    Finding(
        check="events-that-occurred",
        severity="note",
        where="R18",
        message="R18 has happened.",
        todo="Nothing.",
        source="common practice, no source",
    ),
)
"""One finding of each kind, with and without answers."""

CHECKS_RUN = (
    CheckOutcome(
        check="rare-large-events",
        title="Rare but large events",
        outcome="finding",
        threshold="an event is large above: 25 % of the contingency (D: computed)",
    ),
    CheckOutcome(check="copied-ranges", title="Copied ranges", outcome="finding"),
    CheckOutcome(check="no-systemic-layer", title="No systemic risks", outcome="pass"),
    CheckOutcome(
        check="outside-view",
        title="The outside view",
        outcome="not-applicable",
        reason="There is no history.csv.",
    ),
)
"""One outcome of each kind."""


def with_fixed_findings(study):
    """The study with findings and checks that do not change with the registry."""
    return dataclasses.replace(study, findings=FINDINGS, checks_run=CHECKS_RUN)
