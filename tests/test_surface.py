"""A surface by its spectrum: what `surface` tells of it, and what the heat balance makes of it."""

from __future__ import annotations

import csv
import json
import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner
from scipy.constants import sigma, zero_Celsius
from scipy.integrate import trapezoid

from collector.build.collector import collector_of, values_of
from collector.build.reading import read_scenario
from collector.build.surfaces import read_surface
from collector.cli import main
from collector.physics.blackbody import arrhenius_1889, planck_1901
from collector.physics.emittance_curve import EmittanceCurve, emittance_function
from collector.physics.layers import hemispherical_of_normal
from collector.physics.spectrum import Spectrum, emittance
from collector.study.account import runs_of
from collector.study.surface import study_surface
from tests.builds import absorbed as sun
from tests.builds import around, collector, running, standing
from weather.errors import InputError

ROOT = Path(__file__).parents[1]
LAUNDRY, POOL = (ROOT / "scenarios" / f"{name}.toml" for name in ("laundry", "pool"))
COATINGS = ROOT / "scenarios" / "coatings"
SELECTIVE, STACK, PAINT = (COATINGS / name for name in ("selective.csv", "cermet-stack.toml", "black-paint.csv"))
BY_SPECTRUM = "collector.absorber.reflectance_csv=coatings/selective.csv"
BY_STACK = "collector.absorber.stack=coatings/cermet-stack.toml"
POINT = [
    "--beam", "700", "--sky-diffuse", "150", "--ground", "20", "--incidence", "20", "--air", "20", "--sky-temp", "8",
    "--wind", "2",
]  # fmt: skip


def run(*arguments: object):
    found = CliRunner().invoke(main, [str(argument) for argument in arguments], prog_name="noonplate")
    if found.exception is not None and not isinstance(found.exception, SystemExit):
        raise found.exception
    return found


def refused(*arguments: object) -> list[str]:
    found = run(*arguments)
    assert (found.exit_code, found.stdout) == (2, "")
    return [line.removeprefix("noonplate: ").replace(f"{COATINGS}/", "") for line in found.stderr.splitlines()]


def steep() -> EmittanceCurve:
    """Emittance that rises from 0.05 to 0.9 between 300 and 420 K, far more steeply than any coating's."""
    surface = Spectrum(wavelength=np.array([0.3, 6.0, 8.0, 40.0]) * 1e-6, reflectance=np.array([0.0, 0.02, 0.9, 0.97]))
    return emittance_function(surface)


# --- physics


def test_planck_sums_to_stefan_boltzmann():
    wavelength = np.geomspace(0.2e-6, 5e-3, 20_000)
    for t in (280.0, 473.0, 900.0):
        assert trapezoid(planck_1901(wavelength, t=t), wavelength) == pytest.approx(sigma * t**4, rel=1e-5)


def test_planck_peaks_where_wien_says():
    wavelength = np.linspace(5e-6, 15e-6, 100_001)
    assert wavelength[planck_1901(wavelength, t=300.0).argmax()] == pytest.approx(2897.77e-6 / 300.0, rel=1e-4)


def test_arrhenius():
    speed = arrhenius_1889(np.array([373.15, 383.15]), reference=373.15, activation=90e3)
    assert speed[0] == 1.0
    assert speed[1] == pytest.approx(np.exp(90e3 / 8.314462618 * (1 / 373.15 - 1 / 383.15)))


def test_a_corrected_curve_is_the_corrected_emittance():
    surface = read_surface([SELECTIVE], metal=True)
    t = np.linspace(240.0, 690.0, 101)
    exact, _ = hemispherical_of_normal(emittance(surface.normal, t=t).value)
    assert surface.radiating(t)[0] == pytest.approx(exact, abs=1e-6)


def test_a_shifted_curve():
    curve = steep()
    up = curve.shifted(0.01)
    t = np.array([250.0, 333.3, 650.0])
    assert up(t)[0] == pytest.approx(curve(t)[0] + 0.01, abs=1e-12)
    assert up(t)[1] == pytest.approx(curve(t)[1], abs=1e-12)
    assert up.span == pytest.approx((curve.span[0] + 0.01, curve.span[1] + 0.01))


# --- the heat balance


@pytest.mark.parametrize("covers", [0, 1, 2])
def test_the_same_hour_with_its_own_emittance_held(covers):
    """At stagnation nothing but the emittance at the plate's temperature counts: held at that, the hour is the same."""
    curve, facing = steep(), around(t_air=[293.15, 303.15], h_wind=[5.0, 15.0])
    here = sun([900.0, 300.0], covers=covers)
    solved = standing(collector(covers=covers, radiating=curve), facing, here)
    assert solved.converged.all()
    for hour in range(2):
        t_plate = solved.t_plate[hour]
        eps = float(curve(np.array([t_plate]))[0][0])
        held = standing(collector(covers=covers, emittance=eps), facing, here)
        assert held.t_plate[hour] == pytest.approx(t_plate, abs=1e-6)
        assert held.losses.radiation[hour] == pytest.approx(solved.losses.radiation[hour], abs=1e-5)


@pytest.mark.parametrize("covers", [0, 1, 2])
def test_the_same_running_hour_with_its_own_emittance_held(covers):
    """While running the loss's slope, and with it F', knows of the emittance's rise; with a real coating's that is little."""
    surface = read_surface([STACK])
    values = values_of(surface)
    facing, here = around(), sun([800.0], covers=covers)
    solved = running(collector(covers=covers, radiating=surface.radiating, **values), facing, here, inlet=333.15)
    eps = float(surface.radiating(solved.t_plate)[0][0])
    held = running(
        collector(covers=covers, absorptance=values["absorptance"], emittance=eps), facing, here, inlet=333.15
    )
    assert solved.converged.all()
    assert held.useful == pytest.approx(solved.useful, rel=2e-4)
    assert held.t_plate == pytest.approx(solved.t_plate, abs=0.01)


@pytest.mark.parametrize("covers", [0, 1, 3])
def test_the_slope_is_the_slope(covers):
    """The plate's loss, covers free to follow, against its own difference."""
    built, facing = collector(covers=covers, radiating=steep()), around()
    loss = {}
    for shift in (-0.5, 0.0, 0.5):
        # sun that holds the plate near 350 K, and its change with the plate's temperature
        at = standing(built, facing, sun([600.0 + shift], covers=covers))
        loss[shift] = (at.t_plate[0], at.losses.total[0], at.slope[0])
    rise = (loss[0.5][1] - loss[-0.5][1]) / (loss[0.5][0] - loss[-0.5][0])
    assert loss[0.0][2] == pytest.approx(rise, rel=1e-4)


def test_one_emittance_for_all_as_a_curve_is_the_plain_collector():
    grey = Spectrum(wavelength=np.array([0.3, 1.0, 5.0, 25.0]) * 1e-6, reflectance=np.full(4, 0.9))
    facing, here = around(t_air=[280.0, 300.0]), sun([200.0, 900.0])
    plain = running(collector(emittance=0.1), facing, here, inlet=320.0)
    curved = running(collector(emittance=0.1, radiating=emittance_function(grey)), facing, here, inlet=320.0)
    assert curved.useful == pytest.approx(plain.useful, abs=1e-5)
    assert curved.f_r == pytest.approx(plain.f_r, abs=1e-8)


# --- a scenario with a spectrum


@pytest.fixture(scope="module")
def years():
    """The laundry with a spectrum, with a stack, and with either frozen at 100 C."""
    found = {}
    for name, option in (("spectrum", BY_SPECTRUM), ("stack", BY_STACK)):
        scenario = read_scenario(LAUNDRY, overrides=[option])
        absorber = collector_of(scenario).absorber
        frozen = [f"collector.absorber.{key}={getattr(absorber, key)!r}" for key in ("absorptance", "emittance")]
        for key, one in ((name, scenario), (f"{name}, frozen", read_scenario(LAUNDRY, overrides=frozen))):
            (found[key],) = runs_of(one, base=LAUNDRY.parent)
    return found


@pytest.mark.parametrize("name", ["spectrum", "stack"])
def test_frozen_emittance_changes_little_of_the_year_and_some_kelvins_of_stagnation(years, name):
    free, frozen = years[name].account, years[f"{name}, frozen"].account
    assert 0.0 < free["useful_kWh_m2"] / frozen["useful_kWh_m2"] - 1.0 < 0.005  # colder than 100 C it radiates less
    assert 0.5 < frozen["stagnation_plate_C"] - free["stagnation_plate_C"] < 15.0  # hotter it radiates more


@pytest.mark.parametrize("name", ["spectrum", "stack"])
def test_every_hour_balances(years, name):
    run = years[name]
    assert run.sound
    assert run.account["residual_max_W_m2"] < 1e-6
    assert abs(run.account["unaccounted_kWh_m2"]) < 1e-6


def test_the_account_tells_the_coating(years):
    run, found = years["stack"], years["stack"].account["coating"]
    surface, at = read_surface([STACK]), found["emittance_at_C"]
    hours = run.hours
    assert at == pytest.approx((hours.t_plate @ hours.running) / hours.running.sum() - zero_Celsius)
    assert found["absorptance"] == surface.absorptance
    assert found["emittance"] == pytest.approx(
        emittance(surface.hemispherical, t=np.array([at + zero_Celsius])).value[0], abs=1e-6
    )
    assert found["basis"] == "normal absorptance, hemispherical emittance of the stack"
    assert set(surface.notices) <= set(found["notices"]) <= set(run.account["notices"])
    assert not years["stack, frozen"].account["coating"]["by_spectrum"]


def test_hours_beyond_the_table_are_counted(years):
    scenario = read_scenario(LAUNDRY, overrides=[BY_SPECTRUM])
    table = scenario.collector.absorber
    narrow = emittance_function(table.surface.normal, t_least=300.0, t_most=400.0)
    absorber = table.with_surface(replace(table.surface, radiating=narrow))
    held = scenario.model_copy(update={"collector": scenario.collector.model_copy(update={"absorber": absorber})})
    (run,) = runs_of(held, base=LAUNDRY.parent)
    outside = np.count_nonzero((run.still.t_plate < 300.0) | (run.still.t_plate > 400.0))
    said = f"plate outside 27 to 127 C in {outside} h with the pump stopped: emittance held at the end value"
    assert said in run.account["notices"]
    assert run.sound


def test_year_point_and_check_with_a_spectrum():
    text = run("year", LAUNDRY, "--set", BY_SPECTRUM).stdout
    assert "coating      selective.csv: absorptance 0.9500, emittance 0.0486 at 47.3 C;" in text
    assert "a black body's power at 100 C is outside" in re.sub(r"\s+", " ", text)
    stopped = [
        json.loads(run("point", LAUNDRY, *POINT, "--stagnation", "--json", *more).stdout)
        for more in ([], ["--set", BY_STACK])
    ]
    assert stopped[1]["plate_C"] < stopped[0]["plate_C"]
    assert stopped[1]["residual_W_m2"] < 1e-6
    assert any("outside the spectrum's range" in said for said in stopped[1]["notices"])
    assert "selective.csv: wavelength in um by its header" in run("check", LAUNDRY, "--set", BY_SPECTRUM).stdout


def test_an_unglazed_plate_takes_its_emittance_from_the_spectrum():
    option = "collector.absorber.reflectance_csv=coatings/black-paint.csv"
    (run_,) = runs_of(read_scenario(POOL, overrides=[option]), base=POOL.parent)
    assert run_.account["residual_max_W_m2"] < 1e-6
    assert run_.account["coating"]["emittance"] == pytest.approx(0.918, abs=0.002)


@pytest.fixture
def told(tmp_path):
    """Faults of the laundry's scenario with some lines in place of its coating's, in a folder of its own."""
    (tmp_path / "selective.csv").write_text(SELECTIVE.read_text(encoding="utf-8"), encoding="utf-8")
    text = LAUNDRY.read_text(encoding="utf-8")

    def faults(lines: str) -> list[str]:
        path = tmp_path / "it.toml"
        path.write_text(text.replace("absorptance = 0.95\nemittance = 0.05\n", lines + "\n"), encoding="utf-8")
        with pytest.raises(InputError) as caught:
            read_scenario(path)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return faults


FAULTS = {
    "no such spectrum": (
        'reflectance_csv = "none.csv"',
        "it.toml:28: collector.absorber.reflectance_csv: no such file; got 'none.csv'; looked for none.csv",
    ),
    "no such stack": (
        'stack = "none.toml"',
        "it.toml:28: collector.absorber.stack: no such file; got 'none.toml'; looked for none.toml",
    ),
    "a stack that is a spectrum": (
        'stack = "selective.csv"',
        "it.toml:28: collector.absorber.stack: wrong kind of file; got 'selective.csv'; allowed: a TOML file",
    ),
    "a correction without a spectrum": (
        'coating = "copper oxide"\nhemispherical = "metal"',
        "it.toml:29: collector.absorber.hemispherical: corrects a measured spectrum only; allowed: with reflectance_csv",
    ),
    "two ways": (
        'coating = "copper oxide"\nreflectance_csv = "selective.csv"',
        (
            "it.toml:29: collector.absorber.reflectance_csv: keys that exclude each other; got coating, reflectance_csv; "
            "allowed: absorptance with emittance, or coating, or reflectance_csv, or stack"
        ),
    ),
    "an unknown correction": (
        'reflectance_csv = "selective.csv"\nhemispherical = "glass"',
        "it.toml:29: collector.absorber.hemispherical: unknown name; got 'glass'; allowed: 'metal'",
    ),
}


@pytest.mark.parametrize("name", FAULTS)
def test_a_scenario_refused(told, name):
    lines, message = FAULTS[name]
    assert told(lines) == [message]


def test_a_fault_within_the_spectrum_is_told_with_its_line(told, tmp_path):
    (tmp_path / "bad.csv").write_text("wavelength_um,reflectance\n" + "".join(f"{x},{40 * x}\n" for x in range(1, 7)))
    (first, *_) = told('reflectance_csv = "bad.csv"')
    assert first.startswith("bad.csv:")


def test_setting_another_coating_takes_the_correction_out():
    options = [BY_SPECTRUM, "collector.absorber.hemispherical=metal", "collector.absorber.coating=copper oxide"]
    table = read_scenario(LAUNDRY, overrides=options).collector.absorber
    assert (table.coating, table.reflectance_csv, table.hemispherical, table.surface) == (
        "copper oxide",
        None,
        None,
        None,
    )


def test_a_spectrum_in_two_files(tmp_path):
    rows = SELECTIVE.read_text(encoding="utf-8").splitlines()
    head = "\n".join(rows[:2]) + "\n"
    (tmp_path / "short.csv").write_text(head + "\n".join(rows[2:82]) + "\n")
    (tmp_path / "long.csv").write_text(head + "\n".join(rows[80:]) + "\n")
    text = LAUNDRY.read_text(encoding="utf-8").replace(
        "absorptance = 0.95\nemittance = 0.05\n", 'reflectance_csv = ["short.csv", "long.csv"]\n'
    )
    (tmp_path / "it.toml").write_text(text)
    surface = read_scenario(tmp_path / "it.toml").collector.absorber.surface
    assert surface.name == "short.csv + long.csv"
    assert surface.absorptance == pytest.approx(read_surface([SELECTIVE]).absorptance, abs=1e-6)


def test_a_scenario_that_was_not_read_from_its_file_is_refused():
    from collector.build.scenario import Scenario

    given = read_scenario(LAUNDRY, overrides=[BY_SPECTRUM]).model_dump()
    with pytest.raises(InputError, match=r"collector\.absorber: its spectrum has not been read"):
        collector_of(Scenario.model_validate(given))


# --- the command


def test_surface_text():
    for files in ([SELECTIVE], [SELECTIVE, "--hemispherical", "metal"], [STACK], [PAINT]):
        found = run("surface", *files)
        assert (found.exit_code, found.stderr) == (0, "")
        assert found.stdout.isascii()
        assert max(map(len, found.stdout.splitlines())) <= 80
        assert "Caution" in found.stdout


def test_surface_says_which_number_is_which():
    assert "normal absorptance, hemispherical emittance of the stack" in run("surface", STACK).stdout
    plain, corrected = (run("surface", SELECTIVE, *more).stdout for more in ([], ["--hemispherical", "metal"]))
    assert "near-normal absorptance, near-normal emittance" in plain
    assert "hemispherical" not in plain
    assert "hemispherical as a metal's" in re.sub(r"\s+", " ", corrected)


def test_surface_json():
    found = json.loads(run("surface", STACK, "--set", "layer.0.thickness_nm=60", "--working", "80", "--json").stdout)
    whole = study_surface([STACK], working=80.0, stagnation=200.0, metal=False).account
    assert found["absorptance"]["global"]["value"] != whole["absorptance"]["global"]["value"]
    assert [row["t_C"] for row in found["emittance"]] == list(range(0, 401, 25))
    assert (found["working"]["t_C"], found["stagnation"]["t_C"]) == (80.0, 200.0)
    for row in whole["emittance"]:
        assert row["least"] <= row["normal"] <= row["most"]
        assert row["normal"] < row["hemispherical"] < 4.0 / 3.0 * row["normal"]
        assert 0.0 <= row["short"] + row["long"] < 0.25
    assert whole["cut_off_um"] == pytest.approx(2.2, abs=0.2)


def test_surface_out(tmp_path):
    found = run("surface", SELECTIVE, "--out", tmp_path / "new")
    assert found.stderr == f"written to {tmp_path / 'new'}: summary.json, emittance.csv, reflectance.png\n"
    with (tmp_path / "new" / "emittance.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    summary = json.loads((tmp_path / "new" / "summary.json").read_text(encoding="utf-8"))
    assert [float(row["normal"]) for row in rows] == pytest.approx(
        [row["normal"] for row in summary["emittance"]], rel=1e-6
    )
    assert {row["hemispherical"] for row in rows} == {""}
    assert (tmp_path / "new" / "reflectance.png").read_bytes().startswith(b"\x89PNG")


def test_the_metals_correction_says_where_it_does_not_apply():
    found = study_surface([PAINT], working=60.0, stagnation=200.0, metal=True).account
    assert found["working"]["hemispherical"] == found["working"]["normal"]
    said = "the metal's correction leaves 17 of the table's 17 emittances as they are: they are above 0.5"
    assert said in found["notices"]


def test_a_range_too_short_for_sun_and_heat_is_said(tmp_path):
    path = tmp_path / "short.csv"
    path.write_text("wavelength_um,reflectance\n" + "".join(f"{x},0.05\n" for x in (0.5, 0.8, 1.0, 1.5, 2.0)))
    said = read_surface([path]).notices
    assert any("of the sunlight is outside the spectrum's range, end values held" in words for words in said)
    assert any("of a black body's power at 100 C is outside" in words for words in said)


def test_an_emittance_of_nothing_is_held(tmp_path):
    path = tmp_path / "mirror.csv"
    path.write_text("wavelength_um,reflectance\n" + "".join(f"{x},1.0\n" for x in (0.3, 0.8, 1.0, 10.0, 25.0)))
    surface = read_surface([path])
    assert surface.radiating(np.array([350.0]))[0][0] == pytest.approx(0.003)
    assert "mirror.csv: emittance 0.0000 at 100 C held at 0.003 in the heat balance" in surface.notices


COMMAND_FAULTS = {
    "two kinds": (
        [SELECTIVE, STACK],
        ["cermet-stack.toml: a stack goes alone; got 2 files; allowed: CSV files, or one TOML file"],
    ),
    "an override of a spectrum": (
        [SELECTIVE, "--set", "layer.0.n=2"],
        [
            "--set: there is nothing to override in a measured spectrum; got 'layer.0.n=2'; allowed: with one stack in TOML"
        ],
    ),
    "a metal's correction of a stack": (
        [STACK, "--hemispherical", "metal"],
        [
            (
                "--hemispherical: a stack's emittance is integrated over the hemisphere as it is; got 'metal' with a stack; "
                "leave the correction out"
            )
        ],
    ),
    "too hot": ([STACK, "--stagnation", "2000"], ["--stagnation: out of range; got 2000; allowed: -50 to 1000 C"]),
    "too cold": ([STACK, "--working", "nan"], ["--working: out of range; got nan; allowed: -50 to 1000 C"]),
    "no such file": (
        [COATINGS / "none.csv"],
        ["none.csv: spectrum cannot be read: No such file or directory; check the path"],
    ),
}


@pytest.mark.parametrize("name", COMMAND_FAULTS)
def test_surface_refused(name):
    arguments, messages = COMMAND_FAULTS[name]
    assert refused("surface", *arguments) == messages


def test_a_spectrum_that_stops_in_the_near_infrared_tells_no_emittance(tmp_path):
    """Sunlight is all there; of what a plate at 100 C radiates nothing is: no number may look like one."""
    rows = "\n".join(f"{nm},{5 if nm < 2000 else 8}" for nm in range(300, 2501, 50))
    path = tmp_path / "short.csv"
    path.write_text(f"wavelength_nm,reflectance_percent\n{rows}\n", encoding="utf-8")
    result = CliRunner().invoke(main, ["surface", str(path), "--json", "--out", str(tmp_path / "out")])
    assert result.exit_code == 0, result.stderr
    found = json.loads(result.stdout)
    assert found["absorptance"]["global"]["value"] == pytest.approx(0.95, abs=0.005)
    assert all(row["normal"] is None for row in found["emittance"])
    assert any("no emittance is told at 17 of the table's 17 temperatures" in said for said in found["notices"])
    year = ["year", str(LAUNDRY), "--set", f"collector.absorber.reflectance_csv={path}"]
    refused = CliRunner().invoke(main, year)
    assert refused.exit_code == 2
    assert (
        "the spectrum tells no emittance, most of the heat at 100 C is outside its range; got 0.3 to 2.5 um"
        in refused.stderr
    )
