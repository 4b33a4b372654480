"""The check of the answers themselves; `contingency.assurance.run` looks."""

from __future__ import annotations

from contingency.assurance.declaration import COMMON_PRACTICE, Check

STALE_ANSWERS = Check(
    slug="stale-answers",
    subject="answers",
    title="Answers to nothing",
    catches=(
        "An answer copied from an earlier revision to a finding that no longer stands."
    ),
    rule=(
        "Every entry of [[answers]] whose check ran in this run answers a finding of"
        " that check, as a whole or for a row that the finding names."
    ),
    severities=("caution",),
    todo="Remove the answer, or correct its check and its row.",
    sources=(COMMON_PRACTICE,),
)
