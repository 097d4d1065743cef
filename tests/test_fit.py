"""A laboratory made of numbers: points with noise from a known collector, and what the fit says of them."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from collector.build.points import COLUMNS, Points, read_points
from collector.build.reading import read_scenario
from collector.cli import main
from collector.show.fit import draw_residuals, fit_text
from collector.show.plots import save_figure
from collector.study.fit import _powers, fit_report, fitted_of
from weather.errors import InputError

SCENARIOS = Path(__file__).parents[1] / "scenarios"
SIGMA = 6.0  # W/m2, the noise put on every point; about 1 % of a good point
TRUTH = {"eta0": 0.79, "a1_W_m2K": 3.6, "a2_W_m2K2": 0.014}


def points(seed: int, *, levels=(0.0, 20.0, 40.0, 60.0), each=6, sigma: bool = True, **columns) -> Points:
    """Points of a collector with the true coefficients above, in the conditions of a usual outdoor test."""
    rng = np.random.default_rng(seed)
    n = len(levels) * each
    t_air = 293.15 + rng.normal(0.0, 2.0, n)
    beam = rng.uniform(750.0, 1000.0, n)
    given = {
        "beam": beam, "diffuse": np.zeros(n), "incidence_deg": np.zeros(n), "t_air": t_air,
        "t_mean": t_air + np.repeat(levels, each) + rng.normal(0.0, 0.3, n), "t_sky": t_air, "wind": np.full(n, 3.0),
        "sigma": np.full(n, SIGMA) if sigma else None, "lines": tuple(range(2, n + 2)), "notices": (),
    }  # fmt: skip
    given |= columns
    above = given["t_mean"] - given["t_air"]
    power = TRUTH["eta0"] * beam - TRUTH["a1_W_m2K"] * above - TRUTH["a2_W_m2K2"] * above**2
    return Points(**given, power=power + rng.normal(0.0, SIGMA, n))


def inside(result, truth) -> list[bool]:
    terms = {term["name"]: term for term in result["terms"]}
    return [terms[name]["low"] <= value <= terms[name]["high"] for name, value in truth.items()]


@pytest.mark.parametrize("sigma", [True, False], ids=["uncertainties given", "taken from the residuals"])
def test_coefficients_are_recovered_inside_their_own_intervals(sigma):
    """95 % intervals: at least 90 of 100 laboratories, for each coefficient."""
    hits = np.array([inside(fit_report(points(seed, sigma=sigma)), TRUTH) for seed in range(100)])
    assert np.all(hits.sum(axis=0) >= 90)
    assert np.all(hits.mean(axis=0) < 1.0)  # and the intervals are not so wide that they never fail


def test_standard_errors_are_the_scatter_of_the_laboratories():
    found = [{term["name"]: term for term in fit_report(points(seed))["terms"]} for seed in range(100)]
    for name in TRUTH:
        scatter = np.std([terms[name]["value"] or np.nan for terms in found if terms[name]["value"] is not None])
        stated = np.mean([terms[name]["standard_error"] for terms in found])
        assert stated == pytest.approx(scatter, rel=0.35)


def test_build_parameters_are_recovered_inside_their_own_intervals():
    """Emittance and the insulation's conductivity through the heat balance, 100 laboratories, at least 90 inside."""
    scenario = read_scenario(SCENARIOS / "laundry.toml")
    keys = ["collector.absorber.emittance", "collector.absorber.absorptance"]
    truth = {keys[0]: 0.05, keys[1]: 0.95}
    base = points(0, each=3)
    rounded = {name: getattr(base, name) for name in ("beam", "diffuse", "incidence_deg", "t_sky", "wind", "sigma")}
    exact = _powers(scenario, base)
    hits = []
    for seed in range(100):
        noisy = exact + np.random.default_rng(seed).normal(0.0, SIGMA, len(base))
        here = Points(**rounded, t_air=base.t_air, t_mean=base.t_mean, power=noisy, lines=base.lines, notices=())
        hits.append(inside(fitted_of(scenario, here, terms=None, drop=False, parameters=keys), truth))
    assert np.all(np.sum(hits, axis=0) >= 90)


def test_one_level_of_temperature_says_what_it_cannot_tell():
    result = fit_report(points(1, levels=(40.0,), each=20))
    values = {term["name"]: term["value"] for term in result["terms"]}
    assert values["a1_W_m2K"] is None
    assert values["a2_W_m2K2"] is None
    said = "\n".join(result["cannot_tell"])
    assert "a1_W_m2K: the points do not support it" in said
    assert "a1_W_m2K and a2_W_m2K2 are not told apart" in said
    assert any("one level of temperature; the standard asks for 4" in notice for notice in result["notices"])
    page = fit_text(result)
    assert page.count("not known") >= 2


def test_exactly_one_condition_is_found_out_too():
    """No scatter at all: the columns are proportional, and least squares alone would print something."""
    flat = points(2, levels=(30.0,), each=8)
    same = {"beam": 900.0, "t_air": 293.15, "t_sky": 293.15, "t_mean": 323.15}
    one = Points(**(vars(flat) | {name: np.full(8, value) for name, value in same.items()}))
    assert all(term["value"] is None for term in fit_report(one)["terms"])


def test_terms_that_nothing_varies_are_not_asked_for():
    names = [term["name"] for term in fit_report(points(3))["terms"]]
    assert names == list(TRUTH)
    windy = points(3, wind=np.tile([1.0, 3.0, 5.0], 8))
    assert {"a3_J_m3K", "a6_s_m"} <= {term["name"] for term in fit_report(windy)["terms"]}


def test_unsupported_terms_are_dropped_on_request():
    windy = points(4, wind=np.tile([1.0, 3.0, 5.0], 8))  # the truth knows of no wind
    result = fit_report(windy, drop=True)
    assert set(result["dropped"]) <= {"a3_J_m3K", "a6_s_m", "a2_W_m2K2"}
    assert result["dropped"]
    assert all(term["supported"] for term in result["terms"])


def test_incidence_and_diffuse_modifiers_are_found():
    rng = np.random.default_rng(5)
    n = 60
    angle, diffuse, beam = rng.uniform(0.0, 60.0, n), rng.uniform(50.0, 400.0, n), rng.uniform(300.0, 800.0, n)
    above = np.tile([0.0, 20.0, 40.0, 60.0], 15)
    k_beam = 1.0 - 0.15 * (1.0 / np.cos(np.radians(angle)) - 1.0)
    power = 0.8 * (k_beam * beam + 0.9 * diffuse) - 3.5 * above - 0.015 * above**2 + rng.normal(0.0, SIGMA, n)
    measured = Points(
        beam=beam, diffuse=diffuse, incidence_deg=angle, t_air=np.full(n, 293.15), t_mean=293.15 + above,
        t_sky=np.full(n, 293.15), wind=np.full(n, 3.0), power=power, sigma=np.full(n, SIGMA), lines=tuple(range(n)), notices=(),
    )  # fmt: skip
    assert all(inside(fit_report(measured), {"b0": 0.15, "K_diffuse": 0.9, "eta0": 0.8}))


def test_a_point_far_off_is_named_by_its_line():
    measured = points(6)
    power = measured.power.copy()
    power[7] += 120.0
    result = fit_report(Points(**{**vars(measured), "power": power}))
    assert any("far from the fit: line 9 of the file" in said for said in result["notices"])
    assert any("residuals and the uncertainties given do not match" in said for said in result["notices"])


HEAD = "irradiance_W_m2,air_C,mean_C,wind_m_s,power_W_m2"
ROWS = [f"900,20,{20 + level},3,{711 - 3.6 * level:.1f}" for level in (0, 10, 20, 30, 40, 50)]


def written(tmp_path: Path, text: str) -> Path:
    path = tmp_path / "points.csv"
    path.write_text(text, encoding="utf-8")
    return path


def read(path: Path) -> Points:
    return read_points(path, area=2.2, fluid="water", mass_fraction=0.0)


@pytest.mark.parametrize(
    ("head", "row"),
    [
        (HEAD, "900,20,40,3,600"),
        ("beam_W_m2,diffuse_W_m2,air_C,inlet_C,outlet_C,wind_m_s,power_W", "800,100,20,35,45,3,1320"),
        ("irradiance_W_m2,air_C,mean_C,wind_m_s,efficiency", "900,20,40,3,0.66667"),
        ("irradiance_W_m2,air_C,inlet_C,outlet_C,wind_m_s,flow_kg_s", "900,20,36.413,43.587,3,0.044"),
    ],
    ids=["per area", "of the module", "efficiency", "flow: 0.044 kg/s, 4.180 kJ/kgK, 7.174 K, 2.2 m2"],
)
def test_power_by_whichever_columns(tmp_path, head, row):
    measured = read(written(tmp_path, f"# made up\n{head}\n{row}\n"))
    assert measured.power[0] == pytest.approx(600.0, rel=1e-3)
    assert measured.t_mean[0] == pytest.approx(313.15)
    assert measured.lines == (3,)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "no points"),
        (f"{HEAD}\n", "no points"),
        (f"{HEAD.replace('air_C', 'air_c')}\n{ROWS[0]}\n", "unknown column; got 'air_c'; did you mean air_C?"),
        (f"{HEAD}\n{ROWS[0]},7\n", "points.csv:2: wrong number of cells; got 6; allowed: 5"),
        (f"{HEAD}\n900,20,x,3,600\n", "points.csv:2: mean_C: not a number; got 'x'"),
        (f"{HEAD}\n900,20,40,3,nan\n", "points.csv:2: power_W_m2: out of range; got nan"),
        (f"{HEAD}\n9000,20,40,3,600\n", "points.csv:2: irradiance_W_m2: out of range; got 9000; allowed: 0 to 1500"),
        (
            "air_C,mean_C,wind_m_s,power_W_m2\n20,40,3,600\n",
            "no column for the irradiance; allowed: irradiance_W_m2, or",
        ),
        ("irradiance_W_m2,air_C,mean_C,wind_m_s\n900,20,40,3\n", "no column for the power; allowed: power_W, or"),
    ],
)
def test_faults_of_the_points(tmp_path, text, message):
    with pytest.raises(InputError) as caught:
        read(written(tmp_path, text))
    assert message in str(caught.value)


def test_points_that_are_not_there(tmp_path):
    with pytest.raises(InputError, match="points can't be read: No such file"):
        read(tmp_path / "none.csv")


def test_too_few_points_are_refused(tmp_path):
    result = CliRunner().invoke(
        main, ["fit", str(SCENARIOS / "laundry.toml"), str(written(tmp_path, "\n".join([HEAD, *ROWS[:3]])))]
    )
    assert result.exit_code == 2
    assert "too few points; got 3 points for 3 unknowns" in result.stderr


@pytest.mark.parametrize(
    ("option", "message"),
    [
        (["--terms", "eta0,a9"], "--terms: unknown term; got a9; allowed: eta0, a1_W_m2K"),
        (["--terms", "eta0,eta0"], "asked for twice; got eta0"),
        (["--parameter", "collector.absorber.emitance"], "did you mean collector.absorber.emittance?"),
    ],
)
def test_faults_of_what_is_asked(tmp_path, option, message):
    path = written(tmp_path, "\n".join([HEAD, *ROWS]))
    result = CliRunner().invoke(main, ["fit", str(SCENARIOS / "laundry.toml"), str(path), *option])
    assert result.exit_code == 2
    assert message in result.stderr


def test_the_command(tmp_path):
    path = written(tmp_path, "\n".join([HEAD, *ROWS]))
    result = CliRunner().invoke(
        main, ["fit", str(SCENARIOS / "laundry.toml"), str(path), "--out", str(tmp_path / "out")]
    )
    assert result.exit_code == 0, result.stderr
    assert max(map(len, result.stdout.splitlines())) <= 80
    assert sorted(one.name for one in (tmp_path / "out").iterdir()) == ["fit.json", "residuals.png"]
    found = json.loads((tmp_path / "out" / "fit.json").read_text())
    assert found["terms"][0]["value"] == pytest.approx(0.79, abs=1e-3)


def test_figure(tmp_path):
    save_figure(draw_residuals(fit_report(points(8))), path=tmp_path / "residuals.png")


def test_every_column_is_told_of():
    assert all(words for _, _, words in COLUMNS.values())
