"""A user's own EPW file: a real one, from pvlib's source distribution (Amsterdam, IWEC)."""

from __future__ import annotations

import pytest

from tests.measured.archive import data_file
from weather.files import read


@pytest.fixture(scope="module")
def amsterdam():
    return read(data_file("NLD_Amsterdam062400_IWEC.epw"))


def test_sums_as_pvlib_reads_the_columns(amsterdam):
    sums = [float(column.sum()) / 1e3 for column in (amsterdam.ghi, amsterdam.dni, amsterdam.dhi)]
    assert sums == pytest.approx([982.5, 698.9, 590.6], abs=0.06)
    assert amsterdam.t_air.mean() - 273.15 == pytest.approx(10.03, abs=0.006)
    assert amsterdam.wind.mean() == pytest.approx(5.35, abs=0.006)
    assert amsterdam.longwave.mean() == pytest.approx(315.1, abs=0.06)


def test_stamps_are_at_the_start_of_the_hour(amsterdam):
    assert amsterdam.stamp.rule_min == 30.0
    assert amsterdam.stamp.found_min == pytest.approx(30.0, abs=2.0)
    assert amsterdam.stamp.used_min == 30.0


def test_a_file_whose_clock_is_an_hour_off_is_found_out():
    """The same source's typical year of 45 N 8 E as EPW: UTC rows labelled as local time; closure finds some 70 min, not 30."""
    year = read(data_file("tmy_45.000_8.000_2005_2023.epw"))
    assert year.stamp.found_min == pytest.approx(70.6, abs=2.0)
    assert year.stamp.used_min == year.stamp.found_min
    assert any("closure of GHI, DNI and DHI finds +70" in notice for notice in year.notices)
