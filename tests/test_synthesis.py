"""A year out of twelve monthly means: what it meets, what it follows, and the heat it gives beside a real year's."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from pathlib import Path

import numpy as np
import pytest
from scipy.stats import kstest

from collector.build.reading import read_scenario
from collector.study.year import heat_years
from tests.weather_samples import hour_of_year
from weather.clearness import DARKEST, bendt_curve, brightest_day, hourly_clearness
from weather.climate import CLEAN_SKY, YEAR, Climate, frame_of, under_clear_sky
from weather.epw import epw_text
from weather.errors import InputError
from weather.files import read
from weather.sky import magnus_vapour_pressure
from weather.stations import STATIONS, open_weather
from weather.synthesis import synthesise
from weather.year import Site

LAUNDRY = Path(__file__).parents[1] / "scenarios" / "laundry.toml"
SEEDS = range(20)
PLACES = {
    "temperate": Site(name="made", latitude_deg=45.0, longitude_deg=10.0, altitude_m=100.0, utc_offset_h=1.0),
    "south": Site(name="made", latitude_deg=-34.0, longitude_deg=18.0, altitude_m=50.0, utc_offset_h=2.0),
    "60 N": Site(name="made", latitude_deg=60.0, longitude_deg=25.0, altitude_m=20.0, utc_offset_h=2.0),
    "polar night": Site(name="made", latitude_deg=70.0, longitude_deg=25.0, altitude_m=5.0, utc_offset_h=1.0),
    "date line": Site(name="made", latitude_deg=-14.0, longitude_deg=-172.0, altitude_m=5.0, utc_offset_h=13.0),
    "half hour": Site(name="made", latitude_deg=28.0, longitude_deg=77.0, altitude_m=5.0, utc_offset_h=5.5),
    "plateau": Site(name="made", latitude_deg=-16.0, longitude_deg=-68.0, altitude_m=4000.0, utc_offset_h=-4.0),
}
WARMEST = np.cos(2.0 * np.pi * (np.arange(12) - 6.0) / 12.0)


def climate_at(site: Site, *, clearness: float = 0.5, **more) -> Climate:
    """Means of a place that does not exist, its months all equally clear."""
    frame = frame_of(site)
    season = WARMEST * np.sign(site.latitude_deg)
    means = 24e-3 * clearness * frame.by_month(frame.top)
    return Climate(site=site, ghi_kWh_m2=means, t_air=283.0 + 8.0 * season, **more)


def climate_of(weather, *, full: bool = True) -> Climate:
    """Monthly means of a real year, as a climate table would have them."""
    days = weather.t_air.reshape(365, 24)
    daily = {"range": days.max(axis=1) - days.min(axis=1), "mean": days.mean(axis=1)}
    months = weather.month[12::24]
    bare = Climate(
        site=weather.site, ghi_kWh_m2=24e-3 * monthly(weather, weather.ghi), t_air=monthly(weather, weather.t_air)
    )
    if not full:
        return bare
    return replace(
        bare,
        t_range=np.array([daily["range"][months == month].mean() for month in range(1, 13)]),
        t_spread=np.array([daily["mean"][months == month].std(ddof=1) for month in range(1, 13)]),
        humidity=monthly(weather, magnus_vapour_pressure(weather.t_dew) / magnus_vapour_pressure(weather.t_air)),
        wind=monthly(weather, weather.wind),
    )  # fmt: skip


def monthly(weather, values):
    return np.array([values[weather.month == month].mean() for month in range(1, 13)])


@lru_cache(maxsize=8)
def real_and_made(station: str):
    """A real year, and twenty made from its monthly means."""
    real = open_weather(station, base=Path())
    climate = climate_of(real)
    return real, climate, tuple(synthesise(climate, seed=seed) for seed in SEEDS)


# --- what is asked for is met


@pytest.mark.parametrize("station", STATIONS)
def test_monthly_means_are_met(station):
    _, climate, years = real_and_made(station)
    for year in years:
        assert 24e-3 * monthly(year, year.ghi) == pytest.approx(climate.ghi_kWh_m2, rel=0.005)
        assert monthly(year, year.t_air) == pytest.approx(climate.t_air, abs=0.05)
        assert monthly(year, year.wind) == pytest.approx(climate.wind, rel=0.01)
        humidity = magnus_vapour_pressure(year.t_dew) / magnus_vapour_pressure(year.t_air)
        assert monthly(year, humidity) == pytest.approx(climate.humidity, abs=0.01)
        days = year.t_air.reshape(365, 24)
        width = np.repeat(days.max(axis=1) - days.min(axis=1), 24)
        assert monthly(year, width) == pytest.approx(climate.t_range, abs=0.3)


@pytest.mark.parametrize("place", PLACES)
@pytest.mark.parametrize("clear_sky", [False, True])
def test_physical_limits(place, clear_sky):
    climate = climate_at(PLACES[place])
    frame = frame_of(climate.site)
    year = synthesise(climate, seed=5, clear_sky=clear_sky)
    for values in (year.ghi, year.dni, year.dhi, year.t_air, year.t_dew, year.wind, year.cloud):
        assert np.isfinite(values).all()
    assert min(year.ghi.min(), year.dni.min(), year.dhi.min(), year.wind.min()) >= 0.0
    assert year.ghi[frame.cosine <= 0.0].max() == 0.0
    assert year.ghi == pytest.approx(year.dhi + year.dni * frame.cosine, abs=1e-9)
    limit, normal = under_clear_sky(frame.sun, cosine=frame.cosine, site=climate.site, sky=CLEAN_SKY)
    margin = 0.0 if not clear_sky else 1.0  # W/m2; the fits of the two skies cross at the lowest sun
    assert (year.ghi - limit).max() <= margin
    assert clear_sky or (year.dni - normal).max() <= 1e-9
    assert (year.t_dew - year.t_air).max() <= 0.0
    if not clear_sky:  # within 0.01 kWh/m2 where the sun hardly rises
        assert 24e-3 * monthly(year, year.ghi) == pytest.approx(climate.ghi_kWh_m2, rel=0.005, abs=0.01)


@pytest.mark.parametrize("place", ["temperate", "south", "60 N", "date line", "half hour"])
def test_the_day_has_its_course(place):
    year = synthesise(climate_at(PLACES[place], t_spread=np.full(12, 0.1)), seed=1)
    frame = frame_of(PLACES[place])
    solar_hour = frame.sun.solar_hour.reshape(365, 24)
    warmest = np.take_along_axis(solar_hour, year.t_air.reshape(365, 24).argmax(axis=1)[:, np.newaxis], axis=1)
    assert np.median(warmest) == pytest.approx(14.0, abs=0.75)  # two hours after noon
    brightest = np.take_along_axis(solar_hour, year.ghi.reshape(365, 24).argmax(axis=1)[:, np.newaxis], axis=1)
    assert np.median(brightest) == pytest.approx(12.0, abs=0.75)


def test_the_south_is_warm_and_bright_in_january():
    year = synthesise(climate_at(PLACES["south"]), seed=1)
    for values in (year.ghi, year.t_air):
        assert monthly(year, values)[0] > monthly(year, values)[6]


def test_the_seed_alone_tells_years_apart():
    climate = climate_at(PLACES["temperate"])
    first, again, other = (synthesise(climate, seed=seed) for seed in (7, 7, 8))
    for name in ("ghi", "dni", "dhi", "t_air", "t_dew", "wind", "cloud"):
        assert np.array_equal(getattr(first, name), getattr(again, name))
        assert not np.array_equal(getattr(first, name), getattr(other, name))


# --- what it follows


def herzog_curve(clearness, mean):
    """Bendt, Collares-Pereira & Rabl 1981 with the exponent by Herzog's fit; Duffie & Beckman, Eq. 2.9.6, 2.9.7."""
    lowest, highest = 0.05, 0.6313 + 0.267 * mean - 11.9 * (mean - 0.75) ** 8
    xi = (highest - lowest) / (highest - mean)
    rate = -1.498 + (1.184 * xi - 27.182 * np.exp(-1.5 * xi)) / (highest - lowest)
    inside = np.clip(clearness, lowest, highest)
    return (np.exp(rate * lowest) - np.exp(rate * inside)) / (np.exp(rate * lowest) - np.exp(rate * highest))


@pytest.mark.parametrize("mean", [0.3, 0.4, 0.5, 0.6, 0.7])
def test_the_curve_is_the_published_one(mean):
    clearness = np.linspace(DARKEST, brightest_day(mean), 60)
    found = bendt_curve(clearness, mean=mean, highest=brightest_day(mean))
    assert found == pytest.approx(herzog_curve(clearness, mean), abs=0.01)  # the fit's own accuracy


@pytest.mark.parametrize("mean", [0.3, 0.4, 0.5, 0.6])
def test_daily_clearness_is_distributed_as_published(mean):
    """Kolmogorov-Smirnov over twenty years; the days as the hours add up to, after all scaling."""
    climate = climate_at(PLACES["temperate"], clearness=mean)
    frame = frame_of(climate.site)
    clearness = np.array([
        frame.by_day(synthesise(climate, seed=seed).ghi) / frame.by_day(frame.top) for seed in SEEDS
    ])  # fmt: skip
    clear = frame.by_month(frame.limit) / frame.by_month(frame.top)
    months = np.flatnonzero(clear > brightest_day(mean))  # in the others the clear sky ends below the published curve
    assert len(months) >= 3
    for month in months:
        days = clearness[:, frame.month_of_day == month].ravel()
        found = kstest(days, lambda values: herzog_curve(values, mean))
        assert found.statistic < 1.36 / np.sqrt(len(days)), month  # 5 % level


@pytest.mark.parametrize("station", STATIONS)
def test_days_follow_each_other_as_published(station):
    """Graham, Hollands & Huget 1988 find 0.3 about; Richardson's matrices have 0.25, and a month's mean taken off costs some."""
    _, climate, years = real_and_made(station)
    frame = frame_of(climate.site)
    found = []
    for year in years:
        clearness = frame.by_day(year.ghi) / frame.by_day(frame.top)
        means = np.bincount(frame.month_of_day, clearness) / np.bincount(frame.month_of_day)
        departure = clearness - means[frame.month_of_day]
        found.append(np.corrcoef(departure[1:], departure[:-1])[0, 1])
    assert 0.15 < np.mean(found) < 0.4


def test_sunny_days_are_warm_by_day_and_cold_by_night():
    """Richardson 1981: correlation of sunshine 0.19 with the maximum, -0.19 with the minimum."""
    climate = climate_at(PLACES["temperate"], t_range=np.full(12, 10.0), t_spread=np.full(12, 3.0))
    frame = frame_of(climate.site)
    pairs = {"max": [], "min": [], "range": []}
    for seed in SEEDS:
        year = synthesise(climate, seed=seed)
        days = year.t_air.reshape(365, 24)
        season = np.interp(np.arange(365), 15.0 + 30.4 * np.arange(12), climate.t_air, period=365.0)
        clearness = frame.by_day(year.ghi) / frame.by_day(frame.top)
        for name, values in {"max": days.max(axis=1) - season, "min": days.min(axis=1) - season,
                             "range": days.max(axis=1) - days.min(axis=1)}.items():  # fmt: skip
            pairs[name].append(np.corrcoef(clearness, values)[0, 1])
    assert np.mean(pairs["max"]) == pytest.approx(0.186, abs=0.06)
    assert np.mean(pairs["min"]) == pytest.approx(-0.193, abs=0.06)
    assert np.mean(pairs["range"]) > 0.3


@pytest.mark.parametrize("clearness", [0.2, 0.3, 0.4, 0.5, 0.6, 0.7])
def test_the_hourly_trend_keeps_the_days_clearness(clearness):
    """Graham & Hollands 1990 fitted the trend so that its mean over the day is the day's; over the year at 45 N."""
    frame = frame_of(PLACES["temperate"])
    cosine, top = frame.cosine.reshape(365, 24), frame.top.reshape(365, 24)
    trend = hourly_clearness(np.full(365, clearness), cosine=cosine, noise=np.zeros((365, 24)))
    assert (trend * top).sum() / top.sum() == pytest.approx(clearness, abs=0.02)


# --- the year's heat


def heat(weather) -> float:
    scenario = read_scenario(LAUNDRY, overrides=["operation.mean_C=50"])
    return heat_years(scenario, weather=weather)[0].useful_kWh_m2


@pytest.mark.parametrize("station", STATIONS)
def test_the_heat_is_the_real_years(station):
    real, _, years = real_and_made(station)
    heats = [heat(year) for year in years]
    assert np.mean(heats) == pytest.approx(heat(real), rel=0.03)
    assert np.std(heats) < 0.01 * np.mean(heats)


@pytest.mark.parametrize("station", STATIONS)
def test_the_heat_without_more_than_sunlight_and_temperature(station):
    real = open_weather(station, base=Path())
    climate = climate_of(real, full=False)
    years = [synthesise(climate, seed=seed) for seed in SEEDS[:5]]
    assert [len(year.notices) for year in years] == [4] * 5
    assert np.mean([heat(year) for year in years]) == pytest.approx(heat(real), rel=0.05)


# --- the file


@pytest.mark.parametrize("place", PLACES)
@pytest.mark.parametrize("clear_sky", [False, True])
def test_the_readers_own_round_trip(tmp_path, place, clear_sky):
    year = synthesise(climate_at(PLACES[place]), seed=2, clear_sky=clear_sky)
    path = tmp_path / "made.epw"
    path.write_text(epw_text(year, comments=("SYNTHETIC, seed 2", "methods")), encoding="utf-8")
    back = read(path)
    assert back.notices == ()
    assert (back.format, back.stamp.rule_min, back.stamp.used_min) == ("EPW", 30.0, 30.0)
    assert back.stamp.found_min == pytest.approx(30.0, abs=0.1)
    assert back.source_years == (YEAR,)
    assert np.array_equal(back.time_mid, year.time_mid)
    assert np.array_equal(back.month, year.month)
    assert "synthetic" in back.site.name
    for name, half in {"ghi": 0.005, "dni": 0.005, "dhi": 0.005, "t_air": 0.005, "t_dew": 0.005, "wind": 0.005,
                       "cloud": 0.005}.items():  # fmt: skip
        assert getattr(back, name) == pytest.approx(getattr(year, name), abs=1.001 * half), name
    assert back.longwave is None


def test_rows_stamp_the_hours_end():
    year = synthesise(climate_at(PLACES["temperate"]), seed=2)
    rows = epw_text(year, comments=("one", "two")).splitlines()[8:]
    assert len(rows) == 8760
    assert rows[hour_of_year(6, 16, 12)].startswith(f"{YEAR},6,16,13,60,")
    assert {len(row.split(",")) for row in rows} == {35}  # fields of the format's data dictionary


# --- what no year can have


def test_all_faults_of_the_sunlight_at_once():
    climate = climate_at(PLACES["temperate"])
    means = climate.ghi_kWh_m2.copy()
    means[[0, 5, 6]] = 9.0, 11.0, 0.1
    wrong = replace(climate, ghi_kWh_m2=means, site=replace(climate.site, utc_offset_h=8.0))
    with pytest.raises(InputError) as told:
        synthesise(wrong, seed=0)
    said = [problem.what for problem in told.value.problems]
    assert len(said) == 4
    assert "clock and longitude" in said[0]
    assert "January is above what comes in outside the atmosphere there" in said[1]
    assert "June is above what comes through a clear sky there" in said[2]
    assert "July is darker than any sky" in said[3]
