"""The climate file and the command `synthesise`, as a user meets them."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from collector.build.climatefile import read_climate
from collector.build.relations import FIXED
from tests.test_cli import is_narrow_ascii, refused, run
from weather.files import read

ROOT = Path(__file__).parents[1]
EXAMPLE = ROOT / "scenarios" / "climate" / "tarn-hollow.toml"


@pytest.fixture
def altered(tmp_path):
    """The example with a text in it replaced."""

    def write(old: str, new: str) -> Path:
        text = EXAMPLE.read_text(encoding="utf-8")
        assert text.count(old) == 1
        path = tmp_path / "altered.toml"
        path.write_text(text.replace(old, new), encoding="utf-8")
        return path

    return write


def test_the_page(tmp_path):
    out = tmp_path / "made.epw"
    found = run("synthesise", EXAMPLE, "--seed", "1", "--out", out)
    assert found.exit_code == 0
    assert is_narrow_ascii(found.stdout)
    assert found.stdout.startswith("Tarn Hollow (synthetic)\n46.50 N 8.10 E, 620 m, UTC +1 h\n")
    assert "seed 1" in found.stdout
    for words in ("Bendt", "Graham & Hollands", "Erbs", "Richardson"):
        assert words in found.stdout
    january = next(line for line in found.stdout.splitlines() if line.startswith("  Jan"))
    assert january.split() == ["Jan", "1.25", "1.25", "-0.8", "-0.8", "6.2", "6.2", "82", "82", "2.0", "2.0"]
    assert found.stderr == f"written: {out}\n"


def test_the_file_says_what_it_is_and_runs(tmp_path):
    out = tmp_path / "made.epw"
    run("synthesise", EXAMPLE, "--seed", "3", "--out", out)
    lines = out.read_text(encoding="utf-8").splitlines()
    assert lines[5].startswith("COMMENTS 1,SYNTHETIC and not measured")
    assert "tarn-hollow.toml with seed 3" in lines[5]
    assert "Graham & Hollands 1990" in lines[6]
    assert str(tmp_path) not in "".join(lines[:8])
    assert read(out).notices == ()
    year = run("year", ROOT / "scenarios" / "laundry.toml", "--set", f"place.weather={out}")
    assert year.exit_code == 0
    assert "Tarn Hollow (synthetic)" in year.stdout


def test_json(tmp_path):
    out = tmp_path / "made.epw"
    found = run("synthesise", EXAMPLE, "--out", out, "--json")
    assert found.exit_code == 0
    content = json.loads(found.stdout)
    assert "NaN" not in found.stdout
    assert content["seed"] == 0
    assert content["written"] == str(out)
    assert len(content["months"]) == 12
    for month in content["months"]:
        assert month["ghi_kWh_m2"] == pytest.approx(month["asked_ghi_kWh_m2"], rel=0.005)
        assert month["air_C"] == pytest.approx(month["asked_air_C"], abs=0.05)


def test_a_clear_sky_is_a_bound(tmp_path):
    pages = {}
    for option in ("--json", "--clear-sky"):
        found = run("synthesise", EXAMPLE, "--out", tmp_path / f"made{option}.epw", option)
        assert found.exit_code == 0
        pages[option] = found.stdout
    assert "an upper bound" in pages["--clear-sky"]
    assert "aerosol optical depth 0.1" in pages["--clear-sky"]
    assert (read(tmp_path / "made--clear-sky.epw").ghi.sum()) > 1.2 * read(tmp_path / "made--json.epw").ghi.sum()


def test_what_is_left_out_is_said(altered, tmp_path):
    text = EXAMPLE.read_text(encoding="utf-8")
    path = altered(text[text.index("range_K") :], "")
    found = run("synthesise", path, "--out", tmp_path / "made.epw")
    assert found.exit_code == 0
    assert is_narrow_ascii(found.stdout)
    for words in ("no daily range", "no day-to-day deviation", "no humidity", "no wind"):
        assert words in found.stdout


def test_a_file_in_the_way(tmp_path):
    out = tmp_path / "made.epw"
    out.write_text("mine", encoding="utf-8")
    said = refused("synthesise", EXAMPLE, "--out", out)
    assert "there is a file of this name already; choose another name, or --replace" in said[0]
    assert out.read_text(encoding="utf-8") == "mine"
    assert run("synthesise", EXAMPLE, "--out", out, "--replace").exit_code == 0
    assert out.read_text(encoding="utf-8").startswith("LOCATION,")


def test_never_over_its_own_climate(altered):
    path = altered("Tarn Hollow", "Tarn Hollow")
    before = path.read_text(encoding="utf-8")
    assert "the climate's own file" in refused("synthesise", path, "--out", path, "--replace")[0]
    assert path.read_text(encoding="utf-8") == before


def test_faults_of_form_all_at_once_with_their_lines(altered, tmp_path):
    path = altered("latitude = 46.5 ", "latitude = 146.5 ")
    text = path.read_text(encoding="utf-8")
    text = text.replace("air_C = [-0.8, 0.6,", "air_C = [-0.8,").replace("1.25, 2.15,", '1.25, "2.15",')
    path.write_text(text.replace("wind_m_s", "wind_ms"), encoding="utf-8")
    said = refused("synthesise", path, "--out", tmp_path / "made.epw")
    assert said[-1] == "noonplate: 4 faults"
    assert f"{path}:5: place.latitude: out of range; got 146.5; allowed: -90 to 90 deg" in said[0]
    assert "months.ghi_kWh_m2.1: wrong type; got '2.15' (text)" in said[1]
    assert "months.air_C: too few entries; got 11; allowed: twelve numbers, January to December, -70 to 42 C" in said[2]
    assert "months.wind_ms: unknown key; did you mean wind_m_s?" in said[3]
    assert not (tmp_path / "made.epw").exists()


def test_more_sunlight_than_there_is(altered, tmp_path):
    path = altered("ghi_kWh_m2 = [1.25,", "ghi_kWh_m2 = [4.25,")
    said = refused("synthesise", path, "--out", tmp_path / "made.epw")
    assert f"{path}:12: months.ghi_kWh_m2: January is above what comes in outside the atmosphere there, 3." in said[0]
    assert "got 4.25 kWh/m2 a day; allowed: 0." in said[0]


def test_a_clock_that_does_not_fit(altered, tmp_path):
    path = altered("utc_offset_h = 1.0", "utc_offset_h = -8.0")
    said = refused("synthesise", path, "--out", tmp_path / "made.epw")
    assert f"{path}:8: place.utc_offset_h: clock and longitude do not belong together" in said[0]


@pytest.mark.parametrize("arguments", [("--seed", "-1"), ("--seed", "one"), ()])
def test_wrong_options(tmp_path, arguments):
    out = ("--out", str(tmp_path / "made.epw")) if arguments else ()
    assert run("synthesise", EXAMPLE, *arguments, *out).exit_code == 2


def test_no_such_climate(tmp_path):
    said = refused("synthesise", tmp_path / "none.toml", "--out", tmp_path / "made.epw")
    assert "climate file cannot be read" in said[0]


def test_the_example_is_within_what_it_says():
    climate = read_climate(EXAMPLE)
    assert climate.site.name == "Tarn Hollow"
    assert climate.t_range is not None


def test_the_methods_are_listed_with_their_sources():
    named = " ".join(f"{name}: {words}" for name, words in FIXED.items() if name.startswith("synthetic"))
    for author in ("Bendt", "Richardson", "Graham", "Erbs", "de Wit", "Kasten", "Ineichen"):
        assert author in named
