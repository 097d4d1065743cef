"""The efficiency curve, collectors by their test report, and the year that both give."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from collector.build.reading import read_scenario
from collector.cli import main
from collector.show.curve import curve_text, draw_curves
from collector.show.plots import save_figure
from collector.study.curve import Bench, curve_of, fit_coefficients
from collector.study.year import heat_years, open_scenario_weather
from weather.errors import InputError

SCENARIOS = Path(__file__).parents[1] / "scenarios"
MEANS = [25.0, 50.0, 75.0]


@pytest.fixture(scope="module")
def laundry():
    return read_scenario(SCENARIOS / "laundry.toml", overrides=[f"operation.mean_C={MEANS}"])


@pytest.fixture(scope="module")
def curve(laundry):
    return curve_of(laundry, Bench())


def reported(tmp_path: Path, **report: object) -> Path:
    """A scenario like the laundry's, of a collector known by a report."""
    keys = "\n".join(f"{key} = {value}" for key, value in report.items())
    text = f"""title = "by report"
[place]
weather = "greensboro"
albedo = 0.2
[mounting]
tilt_deg = 40.0
azimuth_deg = 180.0
[collector]
modules = 24
length_m = 2.0
width_m = 1.1
[collector.tested]
{keys}
[fluid]
name = "water"
flow_kg_s_m2 = 0.02
[operation]
mean_C = {MEANS}
"""
    path = tmp_path / "reported.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_the_fit_is_close_over_the_whole_range(curve):
    assert curve["fit_largest_points"] < 0.3
    assert curve["fit_rms_points"] <= curve["fit_largest_points"]


def test_coefficients_are_those_of_the_class(curve):
    """Single-glazed selective: eta0 0.74-0.84, a1 2.7-4.2, a2 0.005-0.020 on the aperture, stagnation 160-215 C (from memory)."""
    assert 0.74 < curve["eta0"] < 0.84
    assert 2.7 < curve["a1_W_m2K"] < 4.2
    assert 0.005 < curve["a2_W_m2K2"] < 0.020
    assert 160.0 < curve["stagnation"]["balance_C"] < 215.0


def test_three_ways_to_standard_stagnation_agree_to_a_few_kelvin(curve):
    still = curve["stagnation"]
    assert still["laboratory_C"] == pytest.approx(still["balance_C"], abs=5.0)
    assert still["curve_C"] == pytest.approx(still["balance_C"], abs=20.0)  # the curve is in the bench's wind, 3 m/s


@pytest.mark.parametrize(
    ("eta0", "a1", "a2", "excess", "level"),
    [(0.80, 3.5, 0.015, 142.07, 172.07)],
    ids=["root of eta = 0 at 1000 W/m2 and 30 C, recomputed from ISO 9806's form"],
)
def test_stagnation_from_the_curve(tmp_path, eta0, a1, a2, excess, level):
    path = reported(tmp_path, eta0=eta0, a1_W_m2K=a1, a2_W_m2K2=a2, b0=0.1, area_m2=2.2)
    found = curve_of(read_scenario(path), Bench())
    assert found["stagnation"]["curve_C"] == pytest.approx(level, abs=0.01)
    assert found["stagnation"]["balance_C"] == pytest.approx(30.0 + excess, abs=0.01)


@pytest.mark.parametrize(("above", "power"), [(0, 800.0), (10, 762.6), (30, 679.4), (50, 585.0), (70, 479.4)])
def test_power_of_a_generic_cold_climate_flat_plate(tmp_path, above, power):
    """eta0 0.80, a1 3.6, a2 0.014: Bernardo et al. 2012, Energies 5, 4110; power at 1000 W/m2 recomputed from ISO 9806's form."""
    path = reported(tmp_path, eta0=0.80, a1_W_m2K=3.6, a2_W_m2K2=0.014, b0=0.2, area_m2=2.2)
    arguments = (
        f"point {path} --beam 1000 --sky-diffuse 0 --ground 0 --incidence 0 --air 20 --sky-temp 20 --wind 3".split()
    )
    result = CliRunner().invoke(main, [*arguments, "--mean", str(20 + above), "--json"])
    assert result.exit_code == 0, result.stderr
    assert json.loads(result.stdout)["useful_W_m2"] == pytest.approx(power, abs=0.3)


def test_every_term_has_its_sign(tmp_path):
    """eta0 0.80, Kb 0.95, Kd 0.92, beam 600, diffuse 200, a1 3.5, a2 0.012, a3 0.3, a4 0.4, a6 0.01, a7 0.02, a8 1e-8; 40 K above
    the air, wind 4, long wave 80 W/m2 below that of the air: ISO 9806:2017 form (from memory), recomputed, without a5's 80.
    """
    path = reported(
        tmp_path, eta0=0.80, a1_W_m2K=3.5, a2_W_m2K2=0.012, a3_J_m3K=0.3, a4=0.4, a6_s_m=0.01, a7_J_m3K4=0.02,
        a8_W_m2K4=1e-8, incidence_deg=[0.0, 50.0], K_beam=[0.95, 0.95], K_diffuse=0.92, area_m2=2.2,
    )  # fmt: skip
    air = 293.15
    # the front at 40 deg sees sky and ground by view factor: a sky that makes the plane's long wave 80 W/m2 lower
    share = 0.5 * (1.0 + np.cos(np.radians(40.0)))
    sky = (air**4 - 80.0 / 5.670374419e-8 / share) ** 0.25 - 273.15
    arguments = f"point {path} --beam 600 --sky-diffuse 200 --ground 0 --incidence 40 --air 20 --sky-temp {sky} --wind 4".split()
    result = CliRunner().invoke(main, [*arguments, "--mean", "60", "--json"])
    assert json.loads(result.stdout)["useful_W_m2"] == pytest.approx(313.57 + 80.0, abs=0.3)


def test_incidence_modifier_of_b0(tmp_path):
    """0.98453, 0.94443, 0.9, 0.80762 at 30, 50, 60, 70 deg for b0 = 0.10: Souka & Safwat / ASHRAE 93 form, recomputed."""
    path = reported(tmp_path, eta0=0.80, a1_W_m2K=3.5, b0=0.10, area_m2=2.2)
    found = curve_of(read_scenario(path), Bench())
    modifiers = {row["incidence_deg"]: row["K"] for row in found["K_beam"]}
    expected = {30.0: 0.98453, 50.0: 0.94443, 60.0: 0.9, 70.0: 0.80762}
    assert {angle: modifiers[angle] for angle in expected} == pytest.approx(expected, abs=5e-6)
    assert found["b0"] == pytest.approx(0.10, abs=1e-6)


def test_hemispherical_peak(tmp_path):
    """eta0,b (0.85 + 0.15 Kd) with 0.80 and 0.94 is 0.7928: ISO 9806:2017 Annex B."""
    path = reported(tmp_path, eta0=0.80, a1_W_m2K=3.5, b0=0.10, K_diffuse=0.94, area_m2=2.2)
    assert curve_of(read_scenario(path), Bench())["eta0_hemispherical"] == pytest.approx(
        0.7928, abs=5e-5
    )  # half the last printed digit


def test_a_report_gives_back_its_own_curve(tmp_path):
    path = reported(tmp_path, eta0=0.78, a1_W_m2K=3.9, a2_W_m2K2=0.011, b0=0.12, area_m2=2.2)
    found = curve_of(read_scenario(path), Bench())
    assert (found["eta0"], found["a1_W_m2K"], found["a2_W_m2K2"]) == pytest.approx((0.78, 3.9, 0.011), rel=2e-3)


def test_coefficients_refer_to_their_area(tmp_path):
    path = reported(tmp_path, eta0=0.8, a1_W_m2K=4.0, b0=0.1, area_m2=1.1)  # half of length x width
    found = curve_of(read_scenario(path), Bench())
    assert found["eta0"] == pytest.approx(0.4, abs=1e-4)


def test_a_negative_a2_is_left_out():
    above = np.linspace(0.0, 80.0, 9)
    fitted = fit_coefficients(
        above, efficiency=0.8 - 4.0 * above / 1000.0 + 0.005 * above**2 / 1000.0, irradiance=1000.0
    )
    assert fitted["a2_W_m2K2"] == 0.0
    assert fitted["fit_largest_points"] > 0.1


@pytest.mark.parametrize(("with_terms", "within"), [(False, 0.02), (True, 0.025)])
def test_the_year_by_physics_and_by_the_curve(laundry, curve, tmp_path, with_terms, within):
    """The rest is light of ground and horizon by one modifier, and a loss that is not linear in wind and sky."""
    found = curve_of(laundry, Bench(), terms=True)["with_terms"] if with_terms else curve
    terms = ("eta0", "a1_W_m2K", "a2_W_m2K2", *(("a3_J_m3K", "a4") if with_terms else ()))
    weather = open_scenario_weather(laundry, base=SCENARIOS)
    physics = [year.useful_kWh_m2 for year in heat_years(laundry, weather=weather)]
    path = reported(
        tmp_path,
        **{key: found[key] for key in terms},
        incidence_deg=[row["incidence_deg"] for row in curve["K_beam"]],
        K_beam=[row["K"] for row in curve["K_beam"]],
        K_diffuse=curve["K_diffuse"],
        a5_kJ_m2K=curve["a5_kJ_m2K"],
        area_m2=2.2,
    )
    by_curve = [year.useful_kWh_m2 for year in heat_years(read_scenario(path), weather=weather)]
    assert by_curve == pytest.approx(physics, rel=within)


@pytest.mark.parametrize("tilt", [0.0, 50.0, 90.0])
def test_a_reports_long_wave_term_comes_back_at_any_tilt(tmp_path, tilt):
    """The standard's long wave is that on the collector's plane, however little of the sky it sees."""
    path = reported(tmp_path, eta0=0.74, a1_W_m2K=3.8, a3_J_m3K=0.1, a4=0.2, a6_s_m=0.004, b0=0.1, area_m2=2.2)
    scenario = read_scenario(path, overrides=[f"mounting.tilt_deg={tilt}"])
    found = curve_of(scenario, Bench(), terms=True)
    assert found["with_terms"]["a4"] == pytest.approx(0.2, rel=1e-3)
    assert found["with_terms"]["a6_s_m"] == pytest.approx(0.004, rel=1e-3)
    assert found["eta0"] == pytest.approx(0.74 - 0.2 * 100.0 / 1000.0, abs=2e-4)


def test_a_loss_that_would_vanish_in_calm_air_is_refused(tmp_path):
    path = reported(tmp_path, eta0=0.8, a1_W_m2K=0.2, a3_J_m3K=1.0, b0=0.1, area_m2=2.2)
    with pytest.raises(
        InputError, match=r"in calm air the loss would vanish; got 0\.2 W/m2K; allowed: above 3 a3, 3 W/m2K"
    ):
        read_scenario(path)


def test_hours_beyond_the_tested_range_are_said(tmp_path):
    path = reported(tmp_path, eta0=0.8, a1_W_m2K=3.5, b0=0.1, area_m2=2.2, tested_to_K=30.0)
    result = CliRunner().invoke(main, ["year", str(path), "--set", "operation.mean_C=75", "--json"])
    (run,) = json.loads(result.stdout)["runs"]
    assert any("running h beyond the tested 30 K above the air" in said for said in run["notices"])
    assert any("a test report gives one loss" in said for said in run["notices"])
    assert any("no K_diffuse in the report: 0." in said for said in run["notices"])


def test_a_bench_out_of_bounds_is_refused_with_all_its_faults():
    with pytest.raises(InputError) as caught:
        Bench(irradiance=2000.0, wind=-1.0)
    assert [str(problem) for problem in caught.value.problems] == [
        "--irradiance: out of range; got 2000; allowed: 300 to 1500 W/m2",
        "--wind: out of range; got -1; allowed: 0 to 20 m/s",
    ]


def test_water_is_frozen_on_a_cold_bench(laundry):
    with pytest.raises(
        InputError, match=r"water is frozen at the bench's air temperature; got -10 C; allowed: at least 0\.0 C"
    ):
        curve_of(laundry, Bench(air=-10.0))


def test_page_and_figure(curve, tmp_path):
    page = curve_text(curve)
    assert max(map(len, page.splitlines())) <= 80
    assert page.isascii()
    save_figure(draw_curves([curve]), path=tmp_path / "one.png")
    save_figure(draw_curves([curve] * 5), path=tmp_path / "five.png")


def test_the_command_writes_whole_files(tmp_path):
    arguments = [
        "curve",
        str(SCENARIOS / "laundry.toml"),
        str(SCENARIOS / "pool.toml"),
        "--out",
        str(tmp_path / "out"),
        "--json",
    ]
    result = CliRunner().invoke(main, arguments)
    assert result.exit_code == 0, result.stderr
    assert len(json.loads(result.stdout)["curves"]) == 2
    assert sorted(path.name for path in (tmp_path / "out").iterdir()) == ["curve.json", "curve.png", "points.csv"]
    assert (tmp_path / "out" / "points.csv").read_text().splitlines()[0] == "curve,above_air_K,reduced_m2K_W,efficiency"


@pytest.mark.parametrize(
    ("report", "message"),
    [
        ({"b0": 0.1, "incidence_deg": [0.0, 60.0], "K_beam": [1.0, 0.9]}, "keys that exclude each other"),
        ({}, "nothing given"),
        ({"incidence_deg": [0.0, 60.0], "K_beam": [1.0]}, "does not fit incidence_deg; got 2 angles, 1 values"),
        ({"incidence_deg": [60.0, 0.0], "K_beam": [1.0, 0.9]}, r"angles must rise; got \[60.0, 0.0\]"),
    ],
)
def test_faults_of_a_report(tmp_path, report, message):
    path = reported(tmp_path, eta0=0.8, a1_W_m2K=3.5, area_m2=2.2, **report)
    with pytest.raises(InputError, match=message):
        read_scenario(path)


def test_a_report_takes_the_place_of_the_build(tmp_path):
    path = reported(tmp_path, eta0=0.8, a1_W_m2K=3.5, b0=0.1, area_m2=2.2)
    text = path.read_text().replace("[fluid]", "[collector.casing]\nback_thickness_mm = 50.0\nback_insulation = 'mineral wool'\n"
        "edge_thickness_mm = 20.0\nedge_insulation = 'mineral wool'\nedge_height_mm = 80.0\n[fluid]")  # fmt: skip
    path.write_text(text)
    with pytest.raises(InputError, match="keys that exclude each other; got tested, casing"):
        read_scenario(path)
