"""How years differ: the statistics by hand, the splitting of a file, the command and its messages."""

from __future__ import annotations

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from collector.build.reading import read_scenario
from collector.cli import main
from collector.show.years import years_text
from collector.study import years
from collector.study.year import heat_years
from collector.study.years import spread_of, study_years
from tests.weather_samples import EPW, ROWS, epw_rows, epw_text
from weather.files import read
from weather.split import calendar_years
from weather.stations import open_weather

README = (Path(__file__).parents[1] / "README.md").read_text(encoding="utf-8")
LAUNDRY = Path(__file__).parents[1] / "scenarios" / "laundry.toml"


def dimmed(rows: ROWS, factor: float) -> ROWS:
    """The year with all radiation times a factor: still closed, but another year."""
    for row in rows:
        for name in ("ghi", "dni", "dhi"):
            row[EPW[name]] = f"{factor * float(row[EPW[name]]):.1f}"
    return rows


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """Three files of a year each, and one with the same three years."""
    place = tmp_path_factory.mktemp("years")
    made = {year: dimmed(epw_rows(year=year), factor) for year, factor in ((2007, 1.0), (2008, 0.9), (2009, 0.95))}
    for year, rows in made.items():
        (place / f"y{year}.epw").write_text(epw_text(rows))
    (place / "all.epw").write_text(epw_text([row for rows in made.values() for row in rows]))
    return place


def told(*words: object) -> tuple[int, str, str]:
    result = CliRunner().invoke(main, ["years", str(LAUNDRY), *map(str, words)])
    return result.exit_code, result.stdout, result.stderr


def of_each(folder: Path) -> list[str]:
    return [word for year in (2007, 2008, 2009) for word in ("--weather", str(folder / f"y{year}.epw"))]


# --- statistics


def test_three_years_by_hand():
    """900, 1000, 1100: deviation 100, error 100 / sqrt 3; P90 1000 - 1.28155 x 100; ranks at 1/4, 1/2, 3/4."""
    found = spread_of([1000.0, 900.0, 1100.0])
    assert found == {
        "years": 3,
        "mean_kWh_m2": 1000.0,
        "standard_deviation_kWh_m2": pytest.approx(100.0),
        "standard_error_kWh_m2": pytest.approx(57.735, abs=1e-3),
        "p50_normal_kWh_m2": 1000.0,
        "p90_normal_kWh_m2": pytest.approx(871.845, abs=1e-3),
        "p50_rank_kWh_m2": 1000.0,
        "p90_rank_kWh_m2": None,
        "p90_is_a_guess": True,
    }


def test_nine_years_reach_the_p90_with_their_least():
    """Ranks at 1/10 to 9/10: the ninth is the P90 and the fifth the P50."""
    found = spread_of([float(value) for value in (970, 1010, 930, 1040, 990, 1000, 950, 1020, 1060)])
    assert found["p90_rank_kWh_m2"] == pytest.approx(930.0)
    assert found["p50_rank_kWh_m2"] == pytest.approx(1000.0)
    assert found["p90_is_a_guess"]


def test_nineteen_years_by_rank():
    """Ranks at m/20: the 18th from the top, the second from below."""
    found = spread_of([float(value) for value in range(100, 119)])
    assert found["p90_rank_kWh_m2"] == pytest.approx(101.0)
    assert not found["p90_is_a_guess"]


def test_four_years_lie_straight_between_ranks():
    """Ranks at 0.2, 0.4, 0.6, 0.8: the P50 is half way between the second and the third."""
    assert spread_of([1.0, 2.0, 5.0, 9.0])["p50_rank_kWh_m2"] == pytest.approx(3.5)


def test_years_without_a_difference():
    found = spread_of([700.0] * 12)
    assert found["standard_deviation_kWh_m2"] == 0.0
    assert found["p90_normal_kWh_m2"] == found["p90_rank_kWh_m2"] == 700.0


def test_the_normal_p90_is_exceeded_by_nine_in_ten():
    draws = np.random.default_rng(1).normal(1000.0, 50.0, size=200_000)
    found = spread_of(draws.tolist())
    assert (draws > found["p90_normal_kWh_m2"]).mean() == pytest.approx(0.9, abs=0.002)
    assert found["p90_rank_kWh_m2"] == pytest.approx(found["p90_normal_kWh_m2"], abs=0.6)


# --- a file of several years


def test_a_file_of_several_years_is_split_at_new_year(folder):
    whole = read(folder / "all.epw")
    parts = calendar_years(whole)
    assert [len(part) for part in parts] == [8760, 8784, 8760]
    assert [part.source_years for part in parts] == [(2007,), (2008,), (2009,)]
    assert np.array_equal(np.concatenate([part.ghi for part in parts]), whole.ghi)
    for part, year in zip(parts, (2007, 2008, 2009), strict=True):
        alone = read(folder / f"y{year}.epw")
        assert np.array_equal(part.time_mid, alone.time_mid)
        assert np.array_equal(part.t_air, alone.t_air)


@pytest.mark.parametrize("shift_h", [-13, 0, 11])
def test_the_cut_follows_the_files_own_clock(folder, shift_h):
    whole = read(folder / "all.epw")
    moved = replace(whole, time_mid=whole.time_mid + np.timedelta64(shift_h, "h"))
    assert [len(part) for part in calendar_years(moved)] == [8760, 8784, 8760]


def test_a_single_year_stays_itself():
    weather = open_weather("greensboro", base=Path())
    assert calendar_years(weather) == [weather]


def test_one_file_of_three_years_is_as_three_files(folder):
    code, together, _ = told("--weather", folder / "all.epw", "--json")
    assert code == 0
    apart = json.loads(told(*of_each(folder), "--json")[1])["runs"][0]
    (run,) = json.loads(together)["runs"]
    assert run["spread"] == pytest.approx(apart["spread"])
    assert [year["name"] for year in run["years"]] == ["all 2007", "all 2008", "all 2009"]


# --- the study


def test_each_year_is_the_years_own_heat(folder):
    scenario = read_scenario(LAUNDRY)
    found = study_years(scenario, names=[str(folder / f"y{year}.epw") for year in (2007, 2008, 2009)], base=Path())
    (run,) = found.account["runs"]
    heat = [heat_years(scenario, weather=read(folder / f"y{year}.epw"))[0].useful_kWh_m2 for year in (2007, 2008, 2009)]
    assert [year["useful_kWh_m2"] for year in run["years"]] == pytest.approx(heat)
    assert run["spread"]["mean_kWh_m2"] == pytest.approx(sum(heat) / 3.0)
    assert heat[0] > heat[2] > heat[1]
    assert found.sound


def test_variations_of_a_bundled_year(monkeypatch):
    """Greensboro with all radiation times 12 factors: the mean and the spread are those of the heats."""
    base = open_weather("greensboro", base=Path())
    factors = np.linspace(0.9, 1.0, 12)
    made = {
        f"g{number}": replace(base, ghi=base.ghi * f, dni=base.dni * f, dhi=base.dhi * f, source_years=(2000 + number,))
        for number, f in enumerate(factors)
    }
    monkeypatch.setattr(years, "read_scenario_weather", lambda scenario, *, base: made[scenario.place.weather])
    scenario = read_scenario(LAUNDRY, overrides=["operation.mean_C=[30, 60]"])
    account = study_years(scenario, names=list(made), base=Path()).account
    assert [run["mean_C"] for run in account["runs"]] == [30.0, 60.0]
    for run in account["runs"]:
        heat = np.array([year["useful_kWh_m2"] for year in run["years"]])
        assert np.all(np.diff(heat) > 0.0)
        assert run["spread"]["mean_kWh_m2"] == pytest.approx(heat.mean())
        assert run["spread"]["standard_error_kWh_m2"] == pytest.approx(heat.std(ddof=1) / math.sqrt(12.0))
        assert run["spread"]["p90_rank_kWh_m2"] == pytest.approx(heat[0] + 0.3 * (heat[1] - heat[0]))  # 0.9 x 13 = 11.7
        assert not run["spread"]["p90_is_a_guess"]
    assert not any("guess" in words or "km apart" in words for words in account["remarks"])
    text = years_text(account)
    assert max(map(len, text.splitlines())) <= 80
    assert "a guess" not in text


def test_what_a_page_says(folder):
    code, page, _ = told(*of_each(folder))
    assert code == 0
    assert max(map(len, page.splitlines())) <= 80
    assert page.isascii()
    flat = " ".join(page.split())
    assert "A P90 from 3 years is a guess" in flat
    assert "A P90 by rank needs 9 years" in flat
    assert "Long-term warming, brightening or any other trend is not modelled" in flat
    assert "km apart" not in flat


def test_stations_are_told_from_years_and_typical_years_from_real_ones():
    _, page, _ = told("--weather", "greensboro", "--weather", "sand-point", "--weather", "miami")
    (shown,) = [part for part in README.split("```") if "Exceeded, from 3 years" in part]
    assert shown.removeprefix("text\n") in page
    flat = " ".join(page.split())
    assert "the spread is one of places" in flat
    assert "3 of them are put together from months of several calendar years" in flat


def test_no_heat_in_any_year_is_no_fault(folder):
    code, out, _ = told(*of_each(folder), "--set", "operation.inlet_C=200", "--json")
    spread = json.loads(out)["runs"][0]["spread"]
    assert code == 0
    assert spread["mean_kWh_m2"] == spread["p90_normal_kWh_m2"] == 0.0
    assert told(*of_each(folder), "--set", "operation.inlet_C=200")[0] == 0


def test_table_and_figure(folder, tmp_path):
    code, _, said = told(*of_each(folder), "--out", tmp_path / "out")
    assert code == 0
    assert said == f"written to {tmp_path / 'out'}: years.csv, heat-by-year.png\n"
    assert (tmp_path / "out" / "heat-by-year.png").read_bytes().startswith(b"\x89PNG")
    with (tmp_path / "out" / "years.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert [row["name"] for row in rows] == ["y2007", "y2008", "y2009"]
    assert [int(row["hours"]) for row in rows] == [8760, 8784, 8760]


# --- messages


def test_too_few_years(folder):
    code, out, said = told("--weather", folder / "y2007.epw", "--weather", folder / "y2008.epw")
    assert (code, out) == (2, "")
    assert said == (
        "noonplate: --weather: too few years for a spread; got 2; "
        "allowed: 3 or more: files, stations, or one file of several calendar years\n"
    )


def test_the_same_year_under_two_names(folder, tmp_path):
    (tmp_path / "copy.epw").write_bytes((folder / "y2008.epw").read_bytes())
    code, _, said = told(*of_each(folder), "--weather", tmp_path / "copy.epw")
    assert code == 2
    assert said == (
        "noonplate: --weather: the same year twice; got y2008 and copy; "
        "name each year once: twice the same would narrow the spread\n"
    )


def test_a_station_that_is_none():
    code, _, said = told("--weather", "miamy")
    assert code == 2
    assert said.startswith("noonplate: --weather: neither a bundled station nor a file; got 'miamy'")
    assert "did you mean 'miami'?" in said


def test_a_file_that_is_not_there(tmp_path):
    code, _, said = told("--weather", tmp_path / "no.epw")
    assert code == 2
    assert "no.epw: weather file cannot be read" in said


def test_nothing_named():
    code, _, said = told()
    assert code == 2
    assert "Missing option '--weather'" in said
