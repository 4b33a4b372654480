"""An expected addition of 1.0 to a facility of fifty million.

Source     HM Treasury, The Green Book, box 22.
           https://ppponline.affinitext.com/public/book?id=5905&toc_id=875705
Taken      45, 50 or 55 million with chances 0.1, 0.6 and 0.3; addition +1.0 (read). The
           standard deviation 3.0 follows.
Precision  exact.
Errata     none known.
"""

import pytest

from contingency import read_estimate, run_study
from tests.folders import lay_out

TRIALS = 65_536


def study_of(folder, **rows):
    """The study of a small folder."""
    return run_study(read_estimate(lay_out(folder, trials=TRIALS, **rows)))


def test_a_facility_of_fifty_million(tmp_path):
    """45, 50 or 55 with chances 0.1, 0.6, 0.3: an expected addition of 1.0."""
    study = study_of(
        tmp_path,
        packages=[
            {
                "id": "P1",
                "base": 50,
                "shape": "discrete",
                "outcomes": "45:0.1; 50:0.6; 55:0.3",
            }
        ],
    )

    assert study.cross_check.mean.exact - 50 == pytest.approx(1.0, abs=1e-12)
    assert study.cross_check.standard_deviation.exact == pytest.approx(3.0, rel=1e-12)
