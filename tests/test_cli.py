"""The command line as a user meets it: what is printed where, with which exit code, and what is left on disk."""

from __future__ import annotations

import csv
import errno
import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

from collector.build.catalogue import SHELVES, shelf
from collector.build.relations import FIXED
from collector.build.scenario import CHOICES, Scenario
from collector.cli import VERSION, main
from collector.physics.fluids import FLUIDS
from collector.show import files as show_files
from collector.show.tables import PATHS, year_text
from collector.study.account import HOUR_COLUMNS

ROOT = Path(__file__).parents[1]
SCENARIOS = {name: str(ROOT / "scenarios" / f"{name}.toml") for name in ("hut", "laundry", "pool")}
STARTER = ROOT / "collector" / "build" / "data" / "starter.toml"
YEAR_KEYS = {
    "title", "plane_kWh_m2", "absorbed_kWh_m2", "useful_kWh_m2", "useful_kWh", "hours_on", "optical_kWh_m2",
    "top_convection_kWh_m2", "top_radiation_kWh_m2", "back_kWh_m2", "edge_kWh_m2", "idle_kWh_m2", "stored_kWh_m2",
    "hottest_plate_C", "residual_max_W_m2", "months", "weather", "models", "notices", "cautions",
}  # fmt: skip
MONTH_KEYS = ["month", "plane_kWh_m2", "absorbed_kWh_m2", "useful_kWh_m2", "hours_on"]
POINT_KEYS = {
    "plate_C", "covers_C", "inlet_C", "mean_C", "outlet_C", "absorbed_W_m2", "useful_W_m2", "efficiency", "top_W_m2",
    "back_W_m2", "edge_W_m2", "U_top_W_m2K", "U_loss_W_m2K", "F_prime", "F_R", "residual_W_m2",
}  # fmt: skip
LOST = ("top_convection_kWh_m2", "top_radiation_kWh_m2", "back_kWh_m2", "edge_kWh_m2")
FIGURES = {"heat-by-month", "where-the-sunlight-went"}
WIDTH = 80
NOON = {
    "--beam": "700", "--sky-diffuse": "150", "--ground": "20", "--incidence": "20", "--air": "20", "--sky-temp": "8",
    "--wind": "2",
}  # fmt: skip


def run(*arguments: str | Path):
    """The command's result, standard output and standard error apart; a traceback fails the test."""
    found = CliRunner().invoke(main, [str(argument) for argument in arguments], prog_name="noonplate")
    if found.exception is not None and not isinstance(found.exception, SystemExit):
        raise found.exception
    assert "Traceback" not in found.stdout + found.stderr
    return found


def refused(*arguments: str | Path) -> list[str]:
    """Lines on standard error of a command that must end with exit code 2 and print no result."""
    found = run(*arguments)
    assert (found.exit_code, found.stdout) == (2, "")
    return found.stderr.splitlines()


def point(name: str, *more: str, **changed: str):
    given = NOON | {f"--{key.replace('_', '-')}": value for key, value in changed.items()}
    return run("point", SCENARIOS[name], *(part for pair in given.items() for part in pair), *more)


def told(found) -> dict:
    """The one JSON object printed; NaN and infinities, which are no JSON, are refused."""
    assert (found.exit_code, found.stderr) == (0, "")

    def no_number(word: str) -> float:
        raise AssertionError(f"{word} in the JSON")

    return json.loads(found.stdout, parse_constant=no_number)


def one_line(text: str) -> str:
    return re.sub(r"\s+", " ", text)


def is_narrow_ascii(text: str) -> bool:
    return text.isascii() and text.endswith("\n") and all(len(line) <= WIDTH for line in text.splitlines())


@pytest.fixture(scope="module")
def years():
    """`year` of each scenario, as text and as JSON; each is run once."""
    return {name: (run("year", path), run("year", path, "--json")) for name, path in SCENARIOS.items()}


@pytest.fixture
def flat(tmp_path):
    """The pool's scenario beside the test's own files."""
    path = tmp_path / "pool.toml"
    path.write_text(Path(SCENARIOS["pool"]).read_text(encoding="utf-8"), encoding="utf-8")
    return path


# --- year


@pytest.mark.parametrize("name", SCENARIOS)
def test_year_text(years, name):
    found, _ = years[name]
    assert (found.exit_code, found.stderr) == (0, "")
    assert found.stdout.isascii()
    assert found.stdout.endswith("\n")
    assert "HEAT DELIVERED" in found.stdout
    assert "Filled, mended or out of range" in found.stdout
    assert "Caution" in found.stdout


@pytest.mark.parametrize("name", SCENARIOS)
def test_year_text_is_80_columns_wide(years, name):
    assert [line for line in years[name][0].stdout.splitlines() if len(line) > WIDTH] == []


@pytest.mark.parametrize("name", SCENARIOS)
def test_year_json_keys(years, name):
    runs = told(years[name][1])["runs"]
    assert len(runs) == (3 if name == "hut" else 1)  # the hut asks for three temperatures
    held = {"hut": "mean_C", "laundry": "inlet_C", "pool": "inlet_C"}[name]
    for account in runs:
        assert YEAR_KEYS - set(account) == set()
        assert {"inlet_C", "mean_C"} & set(account) == {held}
        assert [list(month) for month in account["months"]] == [MONTH_KEYS] * 12
        assert [month["month"] for month in account["months"]] == list(range(1, 13))
        assert account["cautions"]
        assert set(account["models"]) == {*CHOICES, "sky_pressure_term"}
    assert [account[held] for account in runs] == {"hut": [35.0, 50.0, 65.0], "laundry": [40.0], "pool": [26.0]}[name]


@pytest.mark.parametrize("name", SCENARIOS)
def test_year_closes(years, name):
    for account in told(years[name][1])["runs"]:
        plane, absorbed, useful = (account[f"{key}_kWh_m2"] for key in ("plane", "absorbed", "useful"))
        lost = sum(account[key] for key in LOST)
        assert plane > absorbed > useful > 0.0
        assert plane == pytest.approx(account["optical_kWh_m2"] + absorbed, rel=1e-9)
        assert absorbed == pytest.approx(useful + lost + account["idle_kWh_m2"] + account["stored_kWh_m2"], rel=1e-9)
        for key in MONTH_KEYS[1:4]:
            assert sum(month[key] for month in account["months"]) == pytest.approx(account[key], rel=1e-9)
        running = sum(month["hours_on"] for month in account["months"])
        assert abs(running - account["hours_on"]) <= 0.5  # the year's is given in whole hours
        assert account["useful_kWh"] == pytest.approx(useful * account["area_m2"], rel=1e-12)
        assert account["residual_max_W_m2"] < 1e-6
        assert account["unconverged_hours"] == 0


def test_year_sizes(years):
    areas = {
        "laundry": 24 * 2.0 * 1.1,
        "pool": 18 * 3.0 * 1.2,
        "hut": 4 * 2.0 * 1.1,
    }  # modules, length, width in the files
    for name, area in areas.items():
        for account in told(years[name][1])["runs"]:
            assert account["area_m2"] == pytest.approx(area, rel=1e-12)
    (laundry,) = told(years["laundry"][1])["runs"]
    assert laundry["gross_area_m2"] == pytest.approx(24 * 2.35)
    assert laundry["useful_kWh_m2_gross"] == pytest.approx(laundry["useful_kWh_m2"] * 2.2 / 2.35, rel=1e-12)


def test_year_text_and_json_tell_the_same(years):
    text, (account,) = years["laundry"][0].stdout, told(years["laundry"][1])["runs"]
    assert f"Heat of the year     {account['useful_kWh_m2']:8.1f} kWh/m2" in text
    assert f"{account['hours_on']} h running" in text
    table = text.partition("Month ")[2].partition("\n\n")[0].splitlines()[2:]
    heats = [float(line.split()[2]) for line in table]
    assert heats == [round(month["useful_kWh_m2"], 1) for month in account["months"]]
    assert f"GHI {account['weather']['ghi_kWh_m2']:.1f}" in re.sub(r"\s+", " ", text)


def test_year_text_adds_up_as_printed(years):
    text = years["laundry"][0].stdout
    block = text.partition("Where the year's sunlight went")[2].partition("\n\n")[0].splitlines()[1:]
    values = [float(re.search(r"  +(-?\d+\.\d)  ", line)[1]) for line in block]
    assert len(values) == 9  # the sunlight and its eight ways
    assert round(sum(values[1:]), 1) == values[0]


def test_colder_inlet_gives_more_heat(years):
    hotter = [account["useful_kWh_m2"] for account in told(years["hut"][1])["runs"]]
    assert hotter == sorted(hotter, reverse=True)


def test_year_compares_scenarios(years):
    found = run("year", SCENARIOS["laundry"], STARTER)
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    lines = found.stdout.splitlines()
    assert lines[0] == "  1  Harrow Creek laundry, wash-water preheat, inlet 40 C"
    assert lines[1] == "  2  My collector, inlet 40 C"
    (heat,) = [line.split() for line in lines if "HEAT DELIVERED" in line]
    alone = [account["useful_kWh_m2"] for account in (told(years["laundry"][1])["runs"][0], _account(STARTER))]
    assert [float(word) for word in heat[-2:]] == pytest.approx(alone, abs=0.1)  # parts are rounded so that they add up


def _account(path: Path) -> dict:
    return told(run("year", path, "--json"))["runs"][0]


def test_year_text_gives_the_heat_one_number(years):
    (account,) = told(years["laundry"][1])["runs"]
    # the parts' last digits make up three tenths, and the heat, with the largest rest, would be the first to be raised
    text = year_text(account | {key: 10.04 for key, _ in PATHS} | {"useful_kWh_m2": 500.049})
    headline = re.search(r"^Heat of the year +(\S+) kWh/m2", text, flags=re.MULTILINE)[1]
    assert headline == "500.0"
    assert re.search(r"^  HEAT DELIVERED +(\S+) ", text, flags=re.MULTILINE)[1] == headline


def test_year_compares_more_runs_than_a_block_holds():
    found = run("year", SCENARIOS["hut"], SCENARIOS["hut"], "--set", "operation.mean_C=[30, 40, 50]")
    assert is_narrow_ascii(found.stdout)
    heads = [line.split()[3:] for line in found.stdout.splitlines() if line.startswith("kWh/m2 a year")]
    assert heads == [["[1]", "[2]", "[3]", "[4]"], ["[5]", "[6]"]]


def test_year_with_overrides(years):
    (account,) = told(
        run("year", SCENARIOS["laundry"], "--set", "operation.inlet_C=60", "--set", "title=Hotter", "--json")
    )["runs"]
    (before,) = told(years["laundry"][1])["runs"]
    assert (account["title"], account["inlet_C"]) == ("Hotter", 60.0)
    assert account["useful_kWh_m2"] < before["useful_kWh_m2"]
    assert account["plane_kWh_m2"] == before["plane_kWh_m2"]


def test_year_weather_beside_the_scenario(flat, tmp_path):
    lines = refused("year", flat, "--set", "place.weather=mine.epw")
    assert len(lines) == 1
    assert lines[0].startswith(f"noonplate: {tmp_path / 'mine.epw'}: weather file cannot be read: No such file")


def test_year_tells_all_faults_and_counts_them():
    lines = refused("year", SCENARIOS["laundry"], "--set", "mounting.tilt_deg=95", "--set", "fluid.flow_kg_s_m2=slow")
    assert lines == [
        "noonplate: --set: mounting.tilt_deg: out of range; got 95; allowed: 0 to 90 deg",
        "noonplate: --set: fluid.flow_kg_s_m2: wrong type; got 'slow' (text); allowed: 0.0005 to 0.5 kg/s m2",
        "noonplate: 2 faults",
    ]


def test_year_of_a_missing_file(tmp_path):
    (line,) = refused("year", tmp_path / "nowhere.toml", "--json")
    assert line.startswith(f"noonplate: {tmp_path / 'nowhere.toml'}: scenario file cannot be read: No such file")


def test_year_of_nothing():
    assert "Missing argument 'SCENARIO...'" in refused("year")[-1]


@pytest.mark.parametrize("as_json", [True, False])
def test_year_that_does_not_converge(monkeypatch, as_json):
    monkeypatch.setattr("collector.balance.steady.MOST_ITERATIONS", 1)
    found = run("year", SCENARIOS["laundry"], *(["--json"] if as_json else []))
    assert found.exit_code == 3
    assert found.stderr == "noonplate: hours without convergence, or sums that do not close: see the result\n"
    if as_json:
        (account,) = json.loads(found.stdout)["runs"]
        assert account["unconverged_hours"] > 0
        assert any("did not converge" in notice for notice in account["notices"])
    else:
        assert "h DID NOT CONVERGE" in found.stdout
        assert "their numbers are not to be trusted" in one_line(found.stdout)


# --- year --out


def _is_png(path: Path) -> bool:
    content = path.read_bytes()
    return content.startswith(b"\x89PNG\r\n\x1a\n") and content.endswith(
        b"IEND\xaeB`\x82"
    )  # first and last bytes of a PNG


def test_out_of_one_run(tmp_path, years):
    out = tmp_path / "new" / "folder"
    found = run("year", SCENARIOS["laundry"], "--out", out)
    assert found.exit_code == 0
    assert found.stdout == years["laundry"][0].stdout
    assert found.stderr == f"written to {out}: summary.json, months.csv, hours.csv, 2 figures\n"
    figures = {f"{name}.png" for name in FIGURES}
    assert {path.name for path in out.iterdir()} == {"summary.json", "months.csv", "hours.csv"} | figures
    assert all(_is_png(out / name) for name in figures)
    summary = json.loads((out / "summary.json").read_text(encoding="utf-8"))
    assert summary == told(years["laundry"][1])
    (account,) = summary["runs"]
    with (out / "months.csv").open(encoding="utf-8", newline="") as file:
        months = list(csv.DictReader(file))
    assert list(months[0]) == ["run", *MONTH_KEYS]
    assert [float(row["useful_kWh_m2"]) for row in months] == pytest.approx(
        [month["useful_kWh_m2"] for month in account["months"]], rel=1e-6
    )
    with (out / "hours.csv").open(encoding="utf-8", newline="") as file:
        hours = list(csv.DictReader(file))
    assert list(hours[0]) == ["run", *HOUR_COLUMNS]
    assert len(hours) == 8760
    assert hours[0]["time"].endswith("-01-01T00:30")
    assert sum(float(row["useful_W_m2"]) for row in hours) / 1e3 == pytest.approx(account["useful_kWh_m2"], rel=1e-6)
    assert abs(sum(float(row["running"]) for row in hours) - account["hours_on"]) <= 0.5  # given in whole hours


def test_out_of_several_runs_is_numbered(tmp_path):
    found = run("year", SCENARIOS["hut"], "--set", "operation.mean_C=[40, 60]", "--out", tmp_path)
    assert found.stderr == f"written to {tmp_path}: summary.json, months.csv, hours.csv, 4 figures\n"
    figures = {f"{name}-{number}.png" for name in FIGURES for number in (1, 2)}
    assert {path.name for path in tmp_path.iterdir()} == {"summary.json", "months.csv", "hours.csv"} | figures
    months = (tmp_path / "months.csv").read_text(encoding="utf-8").splitlines()
    assert [line.partition(",")[0] for line in months] == ["run", *["1"] * 12, *["2"] * 12]


def test_out_onto_a_file(tmp_path):
    place = tmp_path / "taken"
    place.write_text("mine", encoding="utf-8")
    assert refused("year", SCENARIOS["laundry"], "--out", place) == [
        f"noonplate: --out: can't write there: File exists; got {place}; name a folder that can be written to"
    ]
    assert place.read_text(encoding="utf-8") == "mine"
    assert list(tmp_path.iterdir()) == [place]


def test_out_below_a_file(tmp_path):
    (tmp_path / "taken").write_text("mine", encoding="utf-8")
    place = tmp_path / "taken" / "below"
    assert refused("year", SCENARIOS["laundry"], "--out", place) == [
        f"noonplate: --out: can't write there: Not a directory; got {place}; name a folder that can be written to"
    ]


def test_out_where_nothing_may_be_written(tmp_path, monkeypatch):
    def no(*_, **__):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(show_files.tempfile, "NamedTemporaryFile", no)
    assert refused("year", SCENARIOS["laundry"], "--out", tmp_path) == [
        f"noonplate: --out: can't write there: Permission denied; got {tmp_path}; name a folder that can be written to"
    ]
    assert list(tmp_path.iterdir()) == []


def test_out_of_a_wrong_scenario_writes_nothing(tmp_path):
    (line,) = refused("year", SCENARIOS["laundry"], "--set", "mounting.tilt_deg=95", "--out", tmp_path)
    assert "mounting.tilt_deg: out of range; got 95" in line
    assert list(tmp_path.iterdir()) == []


def test_out_of_a_wrong_scenario_makes_no_folder(tmp_path):
    refused("year", SCENARIOS["laundry"], "--set", "mounting.tilt_deg=95", "--out", tmp_path / "new")
    assert not (tmp_path / "new").exists()


def test_out_on_a_full_disk(tmp_path, monkeypatch):
    def full(self, text, **_):
        with self.open("w", encoding="utf-8") as file:
            file.write(text[:100])
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(Path, "write_text", full)
    (line,) = refused("year", SCENARIOS["laundry"], "--out", tmp_path)
    place = tmp_path / "summary.json"
    assert line == f"noonplate: {place}: can't be written: No space left on device; nothing was left half"
    assert list(tmp_path.iterdir()) == []


def test_out_keeps_the_file_of_before_when_the_disk_is_full(tmp_path, monkeypatch):
    (tmp_path / "summary.json").write_text("of before", encoding="utf-8")

    def full(self, *_, **__):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(Path, "write_text", full)
    refused("year", SCENARIOS["laundry"], "--out", tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["summary.json"]
    assert (tmp_path / "summary.json").read_text(encoding="utf-8") == "of before"


def test_out_with_a_figure_that_fails_leaves_no_half_figure(tmp_path, monkeypatch):
    def half(_, *, path):
        path.write_bytes(b"\x89PNG")
        raise OSError(errno.EIO, os.strerror(errno.EIO))

    monkeypatch.setattr("collector.show.plots.save_figure", half)
    (line,) = refused("year", SCENARIOS["laundry"], "--out", tmp_path)
    assert re.fullmatch(
        rf"noonplate: {re.escape(str(tmp_path))}/\S+\.png: can't be written: Input/output error; .*", line
    )
    assert {path.name for path in tmp_path.iterdir()} == {"summary.json", "months.csv", "hours.csv"}


# --- point


@pytest.mark.parametrize("held", ["--inlet", "--mean"])
def test_point_keys_and_energy(held):
    found = told(point("hut", held, "45", "--json"))
    assert POINT_KEYS - set(found) == set()
    assert found[f"{held[2:]}_C"] == 45.0
    assert found["inlet_C"] < found["mean_C"] < found["outlet_C"] < found["plate_C"]
    assert found["plate_C"] > found["covers_C"][1] > found["covers_C"][0] > 8.0  # warmer inwards, above the sky
    spent = found["useful_W_m2"] + found["top_W_m2"] + found["back_W_m2"] + found["edge_W_m2"]
    assert found["absorbed_W_m2"] == pytest.approx(spent, rel=1e-8)
    assert found["top_W_m2"] == pytest.approx(found["top_convection_W_m2"] + found["top_radiation_W_m2"], rel=1e-9)
    assert found["efficiency"] == pytest.approx(found["useful_W_m2"] / 870.0, rel=1e-12)  # 700 + 150 + 20 W/m2
    assert 0.0 < found["F_R"] < found["F_prime"] < 1.0
    assert abs(found["residual_W_m2"]) < 1e-6
    assert found["converged"] is True


def test_point_mean_is_inlet_and_outlet_halved():
    found = told(point("laundry", "--mean", "45", "--json"))
    assert found["inlet_C"] + found["outlet_C"] == pytest.approx(90.0, abs=1e-9)


def test_point_at_stagnation():
    found = told(point("hut", "--stagnation", "--json"))
    assert {key for key in POINT_KEYS if found[key] is None} == {"inlet_C", "mean_C", "outlet_C", "F_prime", "F_R"}
    assert (found["useful_W_m2"], found["efficiency"]) == (0.0, 0.0)
    spent = found["top_W_m2"] + found["back_W_m2"] + found["edge_W_m2"]
    assert found["absorbed_W_m2"] == pytest.approx(spent, rel=1e-8)
    assert found["plate_C"] > 100.0
    assert found["cautions"][0].startswith(f"With the pump stopped the plate reaches {found['plate_C']:.0f} C")


def test_point_in_the_dark():
    found = told(point("hut", "--inlet", "45", "--json", beam="0", sky_diffuse="0", ground="0"))
    assert found["efficiency"] is None
    assert found["absorbed_W_m2"] == 0.0
    assert found["useful_W_m2"] < 0.0
    spent = found["useful_W_m2"] + found["top_W_m2"] + found["back_W_m2"] + found["edge_W_m2"]
    assert spent == pytest.approx(0.0, abs=1e-6)


def test_point_that_loses_heat_says_so():
    notice = "the fluid loses heat at this point: a pump control would stand still"
    assert notice in told(point("hut", "--inlet", "95", "--json", beam="20", sky_diffuse="20"))["notices"]
    assert notice not in told(point("hut", "--inlet", "40", "--json"))["notices"]


def test_point_takes_the_air_for_the_ground():
    silent = told(point("hut", "--inlet", "45", "--json"))
    assert silent == told(point("hut", "--inlet", "45", "--json", ground_temp="20"))
    warmer = told(point("hut", "--inlet", "45", "--json", ground_temp="40"))
    assert warmer["top_radiation_W_m2"] < silent["top_radiation_W_m2"]


@pytest.mark.parametrize("held", [("--inlet", "45"), ("--mean", "45"), ("--stagnation",)])
def test_point_text(held):
    found = point("hut", *held)
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    cell = re.search(r"F', of the slope +(\S+)", found.stdout)[1]
    assert (cell == "-") == (held == ("--stagnation",))


def test_point_text_lists_the_covers_from_outside():
    text, found = point("hut", "--inlet", "45").stdout, told(point("hut", "--inlet", "45", "--json"))
    shown = [float(value) for value in re.findall(r"cover \d.* (\S+) C$", text, flags=re.MULTILINE)]
    assert shown == [round(value, 2) for value in found["covers_C"]]


def test_point_tells_all_that_is_out_of_range():
    found = point(
        "hut", "--inlet", "201", beam="-1", incidence="91", air="-80.5", sky_temp="nan", wind="76", ground_temp="91"
    )
    assert (found.exit_code, found.stdout) == (2, "")
    assert found.stderr.splitlines() == [
        "noonplate: --beam: out of range; got -1; allowed: 0 to 1500 W/m2",
        "noonplate: --incidence: out of range; got 91; allowed: 0 to 90 deg",
        "noonplate: --air: out of range; got -80.5; allowed: -80 to 70 C",
        "noonplate: --sky-temp: out of range; got nan; allowed: -120 to 80 C",
        "noonplate: --ground-temp: out of range; got 91; allowed: -80 to 90 C",
        "noonplate: --wind: out of range; got 76; allowed: 0 to 75 m/s",
        "noonplate: --inlet: out of range; got 201; allowed: -50 to 200 C",
        "noonplate: 7 faults",
    ]


@pytest.mark.parametrize(
    ("option", "value", "allowed"),
    [("sky_diffuse", "1501", "0 to 1500 W/m2"), ("ground", "-0.5", "0 to 1500 W/m2"), ("mean", "-51", "-50 to 200 C")],
)
def test_point_option_out_of_range(option, value, allowed):
    found = point("hut", **{"mean": "40", option: value})
    assert (found.exit_code, found.stdout) == (2, "")
    name = option.replace("_", "-")
    assert found.stderr == f"noonplate: --{name}: out of range; got {value}; allowed: {allowed}\n"


def test_point_with_text_for_a_number():
    found = point("hut", "--inlet", "45", wind="breeze")
    assert (found.exit_code, found.stdout) == (2, "")
    assert "Invalid value for '--wind': 'breeze' is not a valid float." in found.stderr


@pytest.mark.parametrize(
    "held",
    [
        (),
        ("--inlet", "40", "--mean", "40"),
        ("--inlet", "0", "--stagnation"),
        ("--inlet", "1", "--mean", "1", "--stagnation"),
    ],
)
def test_point_needs_one_temperature(held):
    found = point("hut", *held)
    assert (found.exit_code, found.stdout) == (2, "")
    assert found.stderr.splitlines()[-1] == "Error: give exactly one of --inlet, --mean and --stagnation"


def test_point_of_ice():
    found = point("laundry", "--inlet", "-2")
    assert (found.exit_code, found.stdout) == (2, "")
    assert found.stderr == "noonplate: --inlet: water is frozen; got -2 C; allowed: at least 0.0 C\n"


def test_point_with_an_override_and_without_its_weather():
    found = told(
        point("hut", "--inlet", "45", "--set", "place.weather=nowhere.epw", "--set", "place.altitude_m=1500", "--json")
    )
    # standard atmosphere, ICAO: 1500 m is 845.6 hPa
    assert found["pressure_Pa"] == pytest.approx(84560.0, rel=1e-3)
    assert found["notices"] == ["air pressure of the standard atmosphere at 1500 m"]


def test_point_that_does_not_converge(monkeypatch):
    monkeypatch.setattr("collector.balance.steady.MOST_ITERATIONS", 1)
    found = point("hut", "--inlet", "45", "--json")
    assert found.exit_code == 3
    assert json.loads(found.stdout)["converged"] is False
    assert "the balance did not converge: the numbers are not to be trusted" in json.loads(found.stdout)["notices"]


def test_point_that_does_not_converge_says_so_on_standard_error(monkeypatch):
    monkeypatch.setattr("collector.balance.steady.MOST_ITERATIONS", 1)
    assert "converge" in point("hut", "--inlet", "45", "--json").stderr


# --- new, check


def test_new_then_check(tmp_path):
    place = tmp_path / "mine.toml"
    found = run("new", place)
    assert (found.exit_code, found.stderr) == (0, "")
    assert found.stdout == f"written: {place}\nnext: noonplate check {place}; noonplate year {place}\n"
    assert place.read_bytes() == STARTER.read_bytes()
    assert [path.name for path in tmp_path.iterdir()] == ["mine.toml"]
    checked = run("check", place)
    assert (checked.exit_code, checked.stderr) == (0, "")
    assert "nothing wrong in the scenario or its weather" in checked.stdout


def test_new_as_json(tmp_path):
    assert told(run("new", tmp_path / "mine.toml", "--json")) == {"written": str(tmp_path / "mine.toml")}


def test_new_does_not_overwrite(tmp_path):
    place = tmp_path / "mine.toml"
    place.write_text("mine", encoding="utf-8")
    assert refused("new", place) == [
        f"noonplate: {place}: there is a file of this name already; choose another name; nothing was changed"
    ]
    assert place.read_text(encoding="utf-8") == "mine"


def test_new_in_a_missing_folder(tmp_path):
    place = tmp_path / "nowhere" / "mine.toml"
    assert refused("new", place) == [f"noonplate: {place}: no such folder; got {place.parent}; make the folder first"]
    assert list(tmp_path.iterdir()) == []


def test_new_where_nothing_may_be_written(tmp_path, monkeypatch):
    def no(*_, **__):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(show_files.tempfile, "mkstemp", no)
    (line,) = refused("new", tmp_path / "mine.toml")
    assert line.startswith(f"noonplate: {tmp_path / 'mine.toml'}: can't be written: Permission denied")


def test_new_under_a_name_that_no_system_takes(tmp_path):
    (line,) = refused("new", tmp_path / f"{'x' * 300}.toml")
    assert ": can't be written: File name too long; " in line
    (line,) = refused("year", SCENARIOS["laundry"], "--set", f"place.weather={'x' * 300}.epw")
    assert ": weather file cannot be read: File name too long; " in line
    (line,) = refused("year", SCENARIOS["laundry"], "--set", 'place.weather="a\\u0000b.epw"')
    assert ": weather file cannot be read: embedded null byte; " in line


@pytest.mark.parametrize("name", ["hut", "laundry"])
def test_check(name):
    text, found = run("check", SCENARIOS[name]), told(run("check", SCENARIOS[name], "--json"))
    assert (text.exit_code, text.stderr) == (0, "")
    assert is_narrow_ascii(text.stdout)
    assert text.stdout.splitlines()[:2] == [found["title"], "nothing wrong in the scenario or its weather"]
    assert f"{100.0 * found['normal_absorptance_plate']:.1f} % of the sunlight" in text.stdout
    assert 0.5 < found["normal_absorptance_plate"] < 1.0
    assert found["weather"]["hours"] == 8760


def test_check_of_known_casing():
    found = told(run("check", SCENARIOS["laundry"], "--json"))
    assert found["U_back_W_m2K"] == pytest.approx(0.04 / 0.05)  # conductivity over thickness
    assert found["U_edge_W_m2K"] == pytest.approx(0.04 / 0.02 * 2.0 * (2.0 + 1.1) * 0.08 / (2.0 * 1.1))  # on the rim


def test_check_tells_a_fault_with_its_line(tmp_path):
    place = tmp_path / "mine.toml"
    text = STARTER.read_text(encoding="utf-8").replace("tilt_deg = 40.0", "tilt_deg = 400.0")
    place.write_text(text, encoding="utf-8")
    line = 1 + text[: text.index("tilt_deg")].count("\n")
    assert refused("check", place) == [
        f"noonplate: {place}:{line}: mounting.tilt_deg: out of range; got 400.0; allowed: 0 to 90 deg"
    ]


def test_check_reads_the_weather():
    assert refused("check", SCENARIOS["laundry"], "--set", "place.weather=greenboro") == [
        (
            "noonplate: place.weather: neither a bundled station nor a file; got 'greenboro'; "
            "allowed: greensboro, sand-point, miami; did you mean 'greensboro'?"
        )
    ]


WITHOUT_COLUMN = {
    "models.sky=measured": "sky model 'measured' needs long-wave irradiance, which the file does not have throughout",
    "place.albedo=file": "albedo = 'file', but the file has no usable albedo",
}


@pytest.mark.parametrize("option", WITHOUT_COLUMN)
def test_year_without_a_column_it_needs(option):
    (line,) = refused("year", SCENARIOS["laundry"], "--set", option)
    assert line.startswith("noonplate: greensboro (723170TYA.CSV, from pvlib's package data): ")
    assert WITHOUT_COLUMN[option] in line


@pytest.mark.parametrize("option", WITHOUT_COLUMN)
def test_check_without_a_column_it_needs(option):
    (line,) = refused("check", SCENARIOS["laundry"], "--set", option)
    assert WITHOUT_COLUMN[option] in line


# --- what there is to choose from


def test_schema():
    assert told(run("schema")) == told(run("schema", "--json")) == Scenario.model_json_schema()


def test_models_lists_every_choice_with_its_source():
    found = run("models")
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    flat = one_line(found.stdout)
    for step, names in CHOICES.items():
        assert f"models.{step} " in flat
        for name, source in names.items():
            assert f" {name} {one_line(source)} " in f"{flat} "
    assert told(run("models", "--json")) == {**CHOICES, "fluid": FLUIDS, "fixed": FIXED}


def test_catalogue():
    found = run("catalogue")
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    for kind in SHELVES:
        assert f"{kind}\n" in found.stdout
        for name in shelf(kind):
            assert f'  "{name}"\n' in found.stdout
    assert told(run("catalogue", "--json")) == {kind: shelf(kind) for kind in SHELVES}


@pytest.mark.parametrize("kind", SHELVES)
def test_catalogue_of_one_shelf(kind):
    assert told(run("catalogue", kind, "--json")) == {kind: shelf(kind)}
    text = run("catalogue", kind).stdout
    assert text.startswith(f"{kind}\n")
    assert not any(f"\n{other}\n" in text for other in SHELVES)
    assert len(re.findall(r"^ +source: \S", text, flags=re.MULTILINE)) == len(shelf(kind))


def test_catalogue_without_such_a_shelf():
    line = refused("catalogue", "glazings")[-1]
    assert "'glazings' is not one of 'covers', 'coatings', 'metals', 'insulation'." in line


# --- the command itself


def test_version():
    found = run("--version")
    assert (found.exit_code, found.stdout, found.stderr) == (0, f"noonplate, version {VERSION}\n", "")
    declared = re.search(
        r'^version = "(.+)"$', (ROOT / "pyproject.toml").read_text(encoding="utf-8"), flags=re.MULTILINE
    )
    assert declared[1] == VERSION


@pytest.mark.parametrize("word", ["--help", "-h"])
def test_help(word):
    found = run(word)
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    assert set(re.findall(r"^  (\w+)  ", found.stdout, flags=re.MULTILINE)) == set(main.commands)
    assert "Exit codes: 0 done; 2 the input is wrong; 3" in found.stdout


@pytest.mark.parametrize("command", sorted(main.commands))
def test_help_of_a_command(command):
    found = run(command, "--help")
    assert (found.exit_code, found.stderr) == (0, "")
    assert is_narrow_ascii(found.stdout)
    for option in main.commands[command].params:
        if option.param_type_name == "option":
            assert option.opts[0] in found.stdout
            assert option.help


def test_unknown_command():
    assert "No such command 'yaer'." in refused("yaer")[-1]


def test_a_bug_is_not_hidden(monkeypatch):
    def broken(*_, **__):
        raise ZeroDivisionError("a bug")

    monkeypatch.setattr("collector.build.reading.read_scenario", broken)
    found = CliRunner().invoke(main, ["check", SCENARIOS["pool"]])
    assert (found.exit_code, type(found.exception)) == (1, ZeroDivisionError)


def test_installed_command():
    """As a process of its own: the exit code, and result and messages on their own streams."""
    command = [sys.executable, "-c", "from collector.cli import main; main(prog_name='noonplate')"]
    fine = subprocess.run(
        [*command, "catalogue", "metals", "--json"], capture_output=True, text=True, check=False, cwd=ROOT
    )
    assert (fine.returncode, fine.stderr, json.loads(fine.stdout)) == (0, "", {"metals": shelf("metals")})
    wrong = subprocess.run([*command, "check", "nowhere.toml"], capture_output=True, text=True, check=False, cwd=ROOT)
    assert (wrong.returncode, wrong.stdout) == (2, "")
    assert wrong.stderr.startswith("noonplate: nowhere.toml: scenario file cannot be read: No such file or directory; ")
    assert wrong.stderr.count("\n") == 1
