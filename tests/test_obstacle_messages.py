"""What a user is told about a horizon's file and about rows that can't be right."""

from __future__ import annotations

from pathlib import Path

import pytest

from collector.build.obstacles import read_horizon
from collector.build.reading import read_scenario
from weather.errors import InputError
from weather.obstacles import Horizon

ROOT = Path(__file__).parents[1]
DAIRY = ROOT / "scenarios" / "valley" / "dairy.toml"
LAUNDRY = ROOT / "scenarios" / "laundry.toml"


def faults_of_horizon(tmp_path: Path, text: str) -> list[str]:
    path = tmp_path / "skyline.csv"
    path.write_text(text)
    with pytest.raises(InputError) as caught:
        read_horizon(path)
    return [str(problem).replace(str(path), "skyline.csv") for problem in caught.value.problems]


HEAD = "azimuth_deg,elevation_deg\n"
ROWS_WANTED = "a header line azimuth_deg,elevation_deg, and a line a direction, at least two"


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", f"skyline.csv: horizon file is empty; allowed: {ROWS_WANTED}"),
        (HEAD + "10,5\n", f"skyline.csv: too few directions; got 1; allowed: {ROWS_WANTED}"),
        (HEAD, f"skyline.csv: too few directions; got 0; allowed: {ROWS_WANTED}"),
        (
            "azimuth,elevation\n0,1\n90,2\n",
            (
                "skyline.csv:1: wrong columns; got 'azimuth,elevation'; allowed: azimuth_deg,elevation_deg; "
                "units stand in the names: degrees, azimuth clockwise from north"
            ),
        ),
        (
            HEAD + "0,1\nEast,2\n",
            "skyline.csv:3: azimuth_deg: not a number; got 'East'; decimals with a point; no empty cells",
        ),
        (
            HEAD + "0,1\n90,\n",
            "skyline.csv:3: elevation_deg: not a number; got ''; decimals with a point; no empty cells",
        ),
        (HEAD + "0,1\n90,nan\n", "skyline.csv:3: elevation_deg: out of range; got nan; allowed: -5 to 90 deg"),
        (HEAD + "0,1\n90,91\n", "skyline.csv:3: elevation_deg: out of range; got 91; allowed: -5 to 90 deg"),
        (HEAD + "0,-6\n90,1\n", "skyline.csv:2: elevation_deg: out of range; got -6; allowed: -5 to 90 deg"),
        (HEAD + "-10,0\n90,1\n", "skyline.csv:2: azimuth_deg: out of range; got -10; allowed: 0 to 360 deg"),
        (
            HEAD + "# a comment\n0,1\n90,1\n90,2\n",
            (
                "skyline.csv:5: azimuth_deg: does not rise; got 90 after 90; allowed: rising; "
                "sort the rows by azimuth, each direction once"
            ),
        ),
        (HEAD + "0,1\n90,1,7\n", "skyline.csv:3: wrong number of cells; got 3; allowed: 2"),
        (
            HEAD + "0,1\n180,3\n360,2\n",
            (
                "skyline.csv:4: elevation_deg: 0 and 360 deg are one direction; got 1 at 0 deg, 2 at 360 deg; "
                "allowed: the same elevation at both, or one of them"
            ),
        ),
    ],
)
def test_messages_about_the_horizons_file(tmp_path, text, said):
    assert faults_of_horizon(tmp_path, text) == [said]


def test_columns_may_stand_in_either_order(tmp_path):
    path = tmp_path / "skyline.csv"
    path.write_text("elevation_deg,azimuth_deg\n4,0\n8,180\n")
    assert read_horizon(path) == Horizon(azimuth_deg=(0.0, 180.0), elevation_deg=(4.0, 8.0))


def test_a_horizon_that_is_not_text(tmp_path):
    path = tmp_path / "skyline.csv"
    path.write_bytes(b"\xff\xfe\x00")
    with pytest.raises(InputError, match="horizon file is not UTF-8 text"):
        read_horizon(path)


def test_a_horizon_that_is_not_there(tmp_path):
    scenario = tmp_path / "mine.toml"
    scenario.write_text(
        LAUNDRY.read_text().replace("azimuth_deg = 180.0", 'azimuth_deg = 180.0\nhorizon_csv = "no.csv"')
    )
    with pytest.raises(InputError) as caught:
        read_scenario(scenario)
    assert str(caught.value) == (
        f"{scenario}:12: mounting.horizon_csv: no such file; got 'no.csv'; looked for {tmp_path / 'no.csv'}"
    )


@pytest.mark.parametrize(
    ("override", "said"),
    [
        (
            "mounting.rows.row_distance_m=1.4",
            "--set: mounting.rows.row_distance_m: rows overlap; got 1.4 m; allowed: above row_height_m x cos(tilt_deg), 1.414 m",
        ),
        (
            "mounting.rows.slope_of_ground_deg=29.0",
            None,
        ),
        ("mounting.rows.row_count=0", "--set: mounting.rows.row_count: out of range; got 0; allowed: 1 to 10000"),
        (
            "mounting.rows.row_height_m=-1.0",
            "--set: mounting.rows.row_height_m: out of range; got -1.0; allowed: 0.05 to 100 m",
        ),
    ],
)
def test_messages_about_rows(override, said):
    if said is None:
        assert read_scenario(DAIRY, overrides=[override]).mounting.rows
        return
    with pytest.raises(InputError) as caught:
        read_scenario(DAIRY, overrides=[override])
    assert str(caught.value) == said


def test_ground_steeper_than_the_collectors():
    with pytest.raises(
        InputError, match=r"ground steeper than the collectors.*got 20 deg; allowed: at most tilt_deg, 15 deg"
    ):
        read_scenario(DAIRY, overrides=["mounting.tilt_deg=15", "mounting.rows.slope_of_ground_deg=20.0"])
