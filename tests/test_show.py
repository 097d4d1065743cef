"""Tables and figures: what they say follows from the account, whatever the account says."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from collector.build.reading import read_scenario
from collector.show.plots import FIGURES, save_figure
from collector.show.tables import PATHS, rounded_to_sum, year_text
from collector.study.account import runs_of

SCENARIOS = Path(__file__).parents[1] / "scenarios"


@pytest.fixture(scope="module")
def laundry():
    (run,) = runs_of(read_scenario(SCENARIOS / "laundry.toml"), base=SCENARIOS)
    return run.account


@given(st.lists(st.floats(-100.0, 2000.0), min_size=1, max_size=9), st.integers(0, 3))
def test_rounded_parts_add_up(parts, digits):
    rounded = rounded_to_sum(parts, digits=digits)
    last = 10.0**-digits
    assert sum(rounded) == pytest.approx(round(sum(parts), digits), abs=0.51 * last + 1e-9)
    assert all(abs(after - before) <= last * (1.0 + 1e-9) for before, after in zip(parts, rounded, strict=True))


@given(st.lists(st.floats(-100.0, 2000.0), min_size=1, max_size=9), st.integers(0, 3), st.data())
def test_rounded_parts_add_up_round_one_that_is_rounded_by_itself(parts, digits, data):
    first = data.draw(st.integers(0, len(parts) - 1))
    rounded, last = rounded_to_sum(parts, digits=digits, first=first), 10.0**-digits
    assert rounded[first] == pytest.approx(round(parts[first], digits), abs=1e-9)
    assert sum(rounded) == pytest.approx(round(sum(parts), digits), abs=1.01 * last)
    assert all(abs(after - before) <= last * (1.0 + 1e-9) for before, after in zip(parts, rounded, strict=True))


def test_the_page_adds_up_as_printed(laundry):
    names = ["sunlight on the plane", *(words for _, words in PATHS)]
    lines = year_text(laundry).splitlines()
    printed = {
        words: float(line.removeprefix(f"  {words}").split()[0])
        for words in names
        for line in lines
        if line.startswith(f"  {words} ")
    }
    whole = printed.pop("sunlight on the plane")
    assert len(printed) == len(PATHS)
    assert sum(printed.values()) == pytest.approx(whole, abs=1e-6)


def test_nothing_is_shown_of_what_is_not_in_the_account(laundry):
    """The page is made of the plain account alone: after a round trip through JSON it reads the same."""
    assert year_text(json.loads(json.dumps(laundry))) == year_text(laundry)


def test_a_year_without_heat_has_a_page_and_figures(laundry, tmp_path):
    cold = laundry | {"useful_kWh_m2": 0.0, "useful_kWh": 0.0, "hours_on": 0, "useful_kWh_m2_gross": 0.0}
    cold["months"] = [month | {"useful_kWh_m2": 0.0, "plane_kWh_m2": 0.0} for month in laundry["months"]]
    cold["how_sure"] = [row | {"change_pct": None} for row in laundry["how_sure"]]
    assert "0.0 kWh/m2" in year_text(cold)
    for name, draw in FIGURES.items():
        save_figure(draw(cold), path=tmp_path / f"{name}.png")


def test_figures_are_pictures(laundry, tmp_path):
    for name, draw in FIGURES.items():
        path = tmp_path / f"{name}.png"
        save_figure(draw(laundry), path=path)
        assert path.read_bytes().startswith(b"\x89PNG")
        assert path.stat().st_size > 20_000
