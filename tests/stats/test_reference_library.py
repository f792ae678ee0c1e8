"""The statistics library this program stands on, against certified data of NIST."""

from importlib.resources import files

import numpy as np
import pytest
from scipy.stats import f_oneway, linregress

DATA = files("scipy.stats").joinpath("tests", "data")


def lines(*place):
    path = DATA.joinpath(*place)
    if not path.is_file():
        pytest.skip("this build of scipy ships no NIST data")
    rows = path.read_text(encoding="utf-8").splitlines()[59:]
    return [row for row in rows if len(row.split()) == 2 and row.split()[0][:1].isdigit()]


@pytest.mark.outside_value(source="NIST StRD, linear regression, Norris (certified)")
def test_norris():
    y, x = np.array([line.split() for line in lines("nist_linregress", "Norris.dat")], float).T
    found = linregress(x, y)
    assert found.slope == pytest.approx(1.00211681802045, rel=1e-10)
    assert found.intercept == pytest.approx(-0.262323073774029, rel=1e-9)


@pytest.mark.outside_value(source="NIST StRD, analysis of variance, SiRstv (certified)")
def test_sirstv():
    table = np.array([line.split() for line in lines("nist_anova", "SiRstv.dat")], float)
    groups = [table[table[:, 0] == one, 1] for one in np.unique(table[:, 0])]
    assert f_oneway(*groups).statistic == pytest.approx(1.18046237440255, rel=1e-9)
