"""Horizon and rows: closed-form geometry, energy that never grows, and every message about them."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from collector.build.reading import read_scenario
from collector.cli import main
from collector.study.account import runs_of
from collector.study.year import conditions_of
from weather.obstacles import AROUND, Horizon, Obstacles, behind, open_beam, sky_view
from weather.plane import on_plane
from weather.rows import Rows
from weather.stations import open_weather
from weather.sun import sun_position

ROOT = Path(__file__).parents[1]
DAIRY = ROOT / "scenarios" / "valley" / "dairy.toml"
LAUNDRY = ROOT / "scenarios" / "laundry.toml"
README = (ROOT / "README.md").read_text(encoding="utf-8")
COMPASS = (np.arange(AROUND) + 0.5) * 360.0 / AROUND


def cos(degrees: float) -> float:
    return math.cos(math.radians(degrees))


def sin(degrees: float) -> float:
    return math.sin(math.radians(degrees))


def wall_all_around(elevation: float) -> Horizon:
    return Horizon(azimuth_deg=(0.0, 180.0), elevation_deg=(elevation, elevation))


@pytest.fixture(scope="module")
def greensboro():
    weather = open_weather("greensboro", base=Path())
    return weather, sun_position(weather)


def plane_of(greensboro, *, tilt=45.0, azimuth=180.0, model="perez-driesse"):
    weather, sun = greensboro
    return on_plane(weather, sun, tilt_deg=tilt, azimuth_deg=azimuth, albedo=0.2, model=model)


# --- view of the sky


@pytest.mark.parametrize("tilt", [0.0, 25.0, 45.0, 60.0, 90.0])
@pytest.mark.parametrize("azimuth", [0.0, 133.0, 180.0])
def test_the_open_sky_is_liu_and_jordans(tilt, azimuth):
    view = sky_view(np.zeros(AROUND), tilt_deg=tilt, azimuth_deg=azimuth)
    assert view == pytest.approx(0.5 * (1.0 + cos(tilt)), abs=1e-6)


@pytest.mark.parametrize("elevation", [0.0, 5.0, 20.0, 45.0, 80.0, 90.0])
def test_a_wall_all_around_a_flat_plane_leaves_cos_squared(elevation):
    obstacles = Obstacles(tilt_deg=0.0, azimuth_deg=180.0, horizon=wall_all_around(elevation))
    assert obstacles.sky_open == pytest.approx(cos(elevation) ** 2, abs=1e-12)


@pytest.mark.parametrize("elevation", [10.0, 40.0, 75.0])
def test_a_wall_on_one_side_of_a_flat_plane_takes_half_of_that(elevation):
    skyline = np.where(COMPASS < 180.0, elevation, 0.0)
    assert sky_view(skyline, tilt_deg=0.0, azimuth_deg=0.0) == pytest.approx(1.0 - 0.5 * sin(elevation) ** 2, abs=1e-12)


@pytest.mark.parametrize("elevation", [0.0, 15.0, 45.0, 70.0])
def test_a_vertical_plane_before_a_wall_of_even_elevation(elevation):
    """Integral of cos(el)^2 over elevation times that of the cosine over half the compass: (pi/2 - e - sin(2e)/2) / pi."""
    view = sky_view(np.full(AROUND, elevation), tilt_deg=90.0, azimuth_deg=90.0)
    e = math.radians(elevation)
    assert view == pytest.approx((0.5 * math.pi - e - 0.5 * math.sin(2.0 * e)) / math.pi, abs=1e-6)


def test_a_wall_behind_a_vertical_plane_takes_nothing():
    skyline = np.where(np.abs(COMPASS - 180.0) < 89.0, 0.0, 60.0)
    free = sky_view(np.zeros(AROUND), tilt_deg=90.0, azimuth_deg=180.0)
    assert sky_view(skyline, tilt_deg=90.0, azimuth_deg=180.0) == pytest.approx(free, rel=3e-4)


def test_the_skyline_is_straight_between_points_and_around_north():
    skyline = Horizon(azimuth_deg=(30.0, 90.0, 330.0), elevation_deg=(10.0, 16.0, 4.0))
    at = skyline.elevation(np.array([30.0, 60.0, 0.0, 360.0, 345.0, 210.0, -15.0]))
    assert at == pytest.approx([10.0, 13.0, 7.0, 7.0, 5.5, 10.0, 5.5])


def test_an_elevation_below_zero_counts_as_zero():
    assert Horizon(azimuth_deg=(0.0, 90.0), elevation_deg=(-5.0, -5.0)).elevation(COMPASS).max() == 0.0


# --- rows


def test_shaded_share_by_hand():
    """2 m at 30 deg, 3 m apart, sun at 15 deg: the ray over the upper edge (1.732, 1) meets the row behind at 0.7071 of 2 m."""
    rows = Rows(distance=3.0, height=2.0, count=2)
    # lit length from the top = 3 sin 15 / sin 45 = 1.0981 m
    assert rows.shaded(np.array([15.0]), tilt_deg=30.0)[0] == pytest.approx(1.0 - 1.0980762 / 2.0, abs=1e-7)


def test_shaded_share_of_vertical_rows_by_hand():
    """1 m high, 2 m apart, sun at 20 deg: the shadow drops 2 tan 20 = 0.728 m on its way."""
    rows = Rows(distance=2.0, height=1.0, count=2)
    expected = 1.0 - 2.0 * math.tan(math.radians(20.0))
    assert rows.shaded(np.array([20.0]), tilt_deg=90.0)[0] == pytest.approx(expected, abs=1e-12)


def test_rising_ground_shortens_the_shade_by_hand():
    """The same on ground that rises 10 deg: the foot behind stands 2 tan 10 higher."""
    rows = Rows(distance=2.0, height=1.0, count=2, ground_deg=10.0)
    expected = 1.0 - 2.0 * (math.tan(math.radians(20.0)) + math.tan(math.radians(10.0)))
    assert rows.shaded(np.array([20.0]), tilt_deg=90.0)[0] == pytest.approx(max(expected, 0.0), abs=1e-12)
    low = rows.shaded(np.array([5.0]), tilt_deg=90.0)[0]
    assert low == pytest.approx(1.0 - 2.0 * (math.tan(math.radians(5.0)) + math.tan(math.radians(10.0))), abs=1e-12)


def test_total_shade_at_sunrise_on_flat_ground():
    rows = Rows(distance=4.0, height=2.0, count=2)
    assert rows.shaded(np.array([0.0]), tilt_deg=45.0)[0] == 1.0


def test_a_sun_behind_the_rows_throws_no_shade_on_the_next():
    rows = Rows(distance=1.7, height=2.0, count=2)
    assert np.all(rows.shaded(np.linspace(90.0, 134.9, 50), tilt_deg=45.0) == 0.0)


def test_shade_against_rays_through_points():
    """Rays from 2000 places of the row behind toward the sun, cut with the row in front: 200 random fields."""
    rng = np.random.default_rng(7)
    for _ in range(200):
        tilt = rng.uniform(5.0, 90.0)
        ground = rng.uniform(0.0, min(tilt, 20.0))
        height, sun = rng.uniform(0.5, 4.0), rng.uniform(0.5, 179.5 - tilt)
        distance = height * cos(tilt) + rng.uniform(0.1, 6.0)
        up = (np.arange(2000) + 0.5) / 2000.0 * height
        x, z = distance + up * cos(tilt), distance * math.tan(math.radians(ground)) + up * sin(tilt)
        # (x, z) + s (-cos sun, sin sun) on the line through (0, 0) along (cos tilt, sin tilt)
        across = -cos(sun) * sin(tilt) - sin(sun) * cos(tilt)
        s = (z * cos(tilt) - x * sin(tilt)) / across
        along = (x - s * cos(sun)) * cos(tilt) + (z + s * sin(sun)) * sin(tilt)
        struck = (s > 0.0) & (along <= height) & (along >= 0.0)
        rows = Rows(distance=distance, height=height, count=2, ground_deg=ground)
        assert rows.shaded(np.array([sun]), tilt_deg=tilt)[0] == pytest.approx(struck.mean(), abs=6e-4)


def test_far_rows_take_nothing():
    rows = Rows(distance=1e6, height=2.0, count=1000)
    obstacles = Obstacles(tilt_deg=45.0, azimuth_deg=180.0, rows=rows)
    assert rows.shaded(np.array([0.01]), tilt_deg=45.0)[0] == 0.0
    assert obstacles.sky_open == pytest.approx(1.0, abs=1e-5)
    assert obstacles.ground_open == pytest.approx(1.0, abs=1e-5)


@pytest.mark.parametrize(("tilt", "distance"), [(30.0, 3.0), (45.0, 4.0), (60.0, 2.0), (90.0, 1.5)])
def test_masking_angle_is_passias_and_kallbacks_mean(tilt, distance):
    """Their closed form against a fine sum: psi over the height, from arctan(sin / (d/h - cos)) at the foot to 0 on top."""
    height, steps = 2.0, 20_000
    below = (np.arange(steps) + 0.5) / steps * height
    angle = np.degrees(np.arctan2(below * sin(tilt), distance - below * cos(tilt))).mean()
    assert Rows(distance=distance, height=height, count=2).masking_deg(tilt) == pytest.approx(angle, abs=1e-3)


@pytest.mark.parametrize(("tilt", "distance"), [(30.0, 3.0), (45.0, 4.0), (90.0, 2.5)])
def test_sky_left_by_rows(tilt, distance):
    """(1 + cos(tilt + mean masking angle)) / (1 + cos tilt); and near the exact view by crossed strings: the mean is of angles."""
    rows = Rows(distance=distance, height=2.0, count=1_000_000)
    left = Obstacles(tilt_deg=tilt, azimuth_deg=210.0, rows=rows).sky_open
    free = 1.0 + cos(tilt)
    assert left == pytest.approx((1.0 + cos(tilt + rows.masking_deg(tilt))) / free, abs=1e-5)
    top, foot = np.array([2.0 * cos(tilt), 2.0 * sin(tilt)]), np.array([distance, 0.0])
    exact = (2.0 + distance - np.hypot(*(foot - top))) / 2.0  # strings between both upper edges, and from foot to edge
    assert left == pytest.approx(exact / free, rel=0.011)  # 2 % in dense fields


def test_field_is_the_mean_of_its_rows():
    def left(count: int) -> float:
        rows = Rows(distance=3.0, height=2.0, count=count)
        return Obstacles(tilt_deg=45.0, azimuth_deg=180.0, rows=rows).sky_open

    assert left(1) == 1.0
    assert 1.0 - left(4) == pytest.approx(1.5 * (1.0 - left(2)))


def test_ground_between_rows_by_hand():
    """Vertical, 1 m high, 1 m apart: (1 + 1 - sqrt 2) / 2 of a strip, against 1/2 of open ground."""
    rows = Rows(distance=1.0, height=1.0, count=2)
    assert rows.ground_share(90.0) == pytest.approx(2.0 - math.sqrt(2.0), abs=1e-12)
    assert Rows(distance=2.0, height=1.0, count=2).ground_share(0.0) == 1.0


def test_collectors_in_one_plane_with_the_ground_hide_nothing():
    rows = Rows(distance=2.0, height=2.0, count=9, ground_deg=30.0)
    assert rows.masking_deg(30.0) < 0.0
    assert Obstacles(tilt_deg=30.0, azimuth_deg=180.0, rows=rows).sky_open == 1.0


# --- the year


def test_a_horizon_of_zero_is_no_horizon(greensboro):
    weather, sun = greensboro
    free = plane_of(greensboro)
    flat = Obstacles(
        tilt_deg=45.0, azimuth_deg=180.0, horizon=Horizon(azimuth_deg=(0.0, 90.0), elevation_deg=(0.0, -3.0))
    )
    seen = behind(flat, free, weather=weather, sun=sun)
    for part in ("beam", "sky", "horizon", "ground"):
        assert np.array_equal(getattr(seen, part), getattr(free, part)), part


@pytest.mark.parametrize("model", ["isotropic", "hay-davies", "perez", "perez-driesse"])
@pytest.mark.parametrize(("tilt", "azimuth"), [(0.0, 180.0), (45.0, 130.0), (90.0, 270.0)])
def test_energy_never_grows(greensboro, model, tilt, azimuth):
    weather, sun = greensboro
    free = plane_of(greensboro, tilt=tilt, azimuth=azimuth, model=model)
    skyline = Horizon(azimuth_deg=(10.0, 100.0, 250.0), elevation_deg=(3.0, 35.0, 12.0))
    rows = Rows(distance=2.1, height=2.0, count=5)
    seen = behind(
        Obstacles(tilt_deg=tilt, azimuth_deg=azimuth, horizon=skyline, rows=rows), free, weather=weather, sun=sun
    )
    for part in ("beam", "sky", "horizon", "ground"):
        now, before = getattr(seen, part), getattr(free, part)
        assert np.all((now >= 0.0) & (now <= before)), part


def test_a_wall_takes_the_beam_while_the_sun_is_lower(greensboro):
    weather, sun = greensboro
    free = plane_of(greensboro)
    obstacles = Obstacles(tilt_deg=45.0, azimuth_deg=180.0, horizon=wall_all_around(20.0))
    share = open_beam(obstacles, weather=weather, sun=sun, lit=free.beam)
    above, lit = 90.0 - sun.apparent_zenith_deg, free.beam > 0.0
    assert np.all(share[lit & (above > 28.0)] == 1.0)  # more than half an hour of the sun's way from the wall's edge
    assert np.all(share[lit & (above < 12.0)] == 0.0)
    assert np.count_nonzero((share > 0.0) & (share < 1.0)) > 300


def test_parts_of_an_hour_agree_with_a_sun_by_the_minute(greensboro):
    """The year's beam against the same wall with the sun computed every minute: half a per mille of the beam."""
    from weather.sun import sun_at

    weather, sun = greensboro
    free = plane_of(greensboro)
    obstacles = Obstacles(tilt_deg=45.0, azimuth_deg=180.0, horizon=wall_all_around(15.0))
    share = open_beam(obstacles, weather=weather, sun=sun, lit=free.beam)
    hours = np.flatnonzero(free.beam > 0.0)[::23]
    minutes = np.arange(60) * 60 + 30 - 1800
    times = (weather.time_mid[hours][:, np.newaxis] + minutes.astype("timedelta64[s]")).ravel()
    fine = sun_at(times, site=weather.site)
    zenith, turn = np.radians(fine.apparent_zenith_deg), np.radians(fine.azimuth_deg - 180.0)
    falls = np.cos(zenith) * cos(45.0) + np.sin(zenith) * sin(45.0) * np.cos(turn)
    falls = np.where(zenith < 0.5 * np.pi, np.maximum(falls, 0.0), 0.0).reshape(len(hours), 60)
    comes = np.where(90.0 - fine.apparent_zenith_deg.reshape(falls.shape) > 15.0, falls, 0.0)
    exact = comes.sum(axis=1) / falls.sum(axis=1)
    beam = free.beam[hours]
    assert (share[hours] * beam).sum() == pytest.approx((exact * beam).sum(), rel=5e-4)
    assert np.abs(share[hours] - exact).max() < 0.1


def test_long_wave_loses_the_share_of_sky():
    scenario = read_scenario(DAIRY)
    weather = open_weather("greensboro", base=Path())
    found = conditions_of(scenario, weather=weather)
    obstacles = Obstacles(
        tilt_deg=45.0,
        azimuth_deg=180.0,
        horizon=scenario.mounting.horizon,
        rows=Rows(distance=4.0, height=2.0, count=4),
    )
    assert found.model.network.sky_share == pytest.approx(obstacles.sky_open * 0.5 * (1.0 + cos(45.0)))
    assert found.model.collector.sky_open < 1.0


# --- a scenario's year


@pytest.fixture(scope="module")
def dairy():
    (run,) = runs_of(read_scenario(DAIRY), base=DAIRY.parent)
    return run


def test_the_account_says_what_was_taken(dairy):
    taken = dairy.account["obstacles"]
    free = conditions_of(
        read_scenario(DAIRY).model_copy(
            update={"mounting": read_scenario(LAUNDRY).mounting.model_copy(update={"tilt_deg": 45.0})}
        ),
        weather=dairy.year.conditions.weather,
    )
    whole = free.plane.total.sum() / 1e3
    assert taken["beam_kWh_m2"] > 0.0
    assert taken["diffuse_kWh_m2"] > 0.0
    assert dairy.account["plane_kWh_m2"] + taken["beam_kWh_m2"] + taken["diffuse_kWh_m2"] == pytest.approx(whole)
    assert dairy.sound
    assert any("4 rows computed as one collector" in said for said in dairy.account["notices"])


def test_page_of_the_valley():
    result = CliRunner().invoke(main, ["year", str(DAIRY)])
    assert result.exit_code == 0
    assert "  taken by horizon and rows (beam " in result.stdout
    assert "horizon of skyline.csv, 4 rows" in result.stdout
    (shown,) = [part for part in README.split("```") if "taken by horizon and rows" in part]
    assert shown.removeprefix("text\n") in result.stdout
    assert "shading;" not in result.stdout
    assert max(map(len, result.stdout.splitlines())) <= 80
    assert result.stdout.isascii()
    assert "invented" in DAIRY.read_text().lower()
    assert "invented" in (DAIRY.parent / "skyline.csv").read_text().lower()


def test_without_obstacles_nothing_is_said():
    result = CliRunner().invoke(main, ["year", str(LAUNDRY), "--json"])
    (run,) = json.loads(result.stdout)["runs"]
    assert run["obstacles"] is None


def test_a_comparison_has_the_row_too():
    result = CliRunner().invoke(main, ["year", str(DAIRY), str(LAUNDRY)])
    (line,) = [line for line in result.stdout.splitlines() if line.startswith("taken by horizon and rows")]
    assert line.split()[-1] == "0.0"
    assert max(map(len, result.stdout.splitlines())) <= 80


def test_a_dark_valley_gives_no_heat_and_no_fault(tmp_path):
    (tmp_path / "wall.csv").write_text("azimuth_deg,elevation_deg\n0,90\n180,90\n")
    scenario = tmp_path / "dark.toml"
    text = LAUNDRY.read_text().replace("azimuth_deg = 180.0", 'azimuth_deg = 180.0\nhorizon_csv = "wall.csv"')
    scenario.write_text(text)
    result = CliRunner().invoke(main, ["year", str(scenario), "--json"])
    (run,) = json.loads(result.stdout)["runs"]
    assert result.exit_code == 0
    assert run["useful_kWh_m2"] < 1e-6
    assert run["obstacles"]["sky_open"] == pytest.approx(0.0, abs=1e-12)
