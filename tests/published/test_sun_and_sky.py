"""Where the sun stands, what reaches a tilted plane, and the temperature of a clear sky."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy.constants import zero_Celsius

from tests.published.printed import printed
from weather.plane import on_plane
from weather.sky import (
    berdahl_martin_emissivity,
    brunt_emissivity,
    longwave_temperature,
    martin_berdahl_emissivity,
    sky_temperature,
    swinbank_temperature,
)
from weather.sun import Sun, sun_at
from weather.year import Site, Stamp, WeatherYear

PLACE = Site(name="example", latitude_deg=39.742476, longitude_deg=-105.1786, altitude_m=1830.14, utc_offset_h=-7.0)
MJ = 1e6 / 3600.0  # W/m2 over an hour


def hour(**given: Any) -> WeatherYear:
    """One hour of weather, dark unless told otherwise."""
    stamp = Stamp(rule_min=0.0, found_min=None, used_min=0.0, rmse_w_m2=None, rmse_unshifted_w_m2=None)
    values: dict[str, Any] = {name: np.zeros(1) for name in ("ghi", "dni", "dhi", "wind")}
    values |= dict.fromkeys(("t_dew", "cloud", "longwave", "albedo"))
    values |= {"t_air": np.array([293.15]), "month": np.array([2]), "pressure": 101_325.0, "source_years": (2003,)}
    values |= {"time_mid": np.array(["2003-02-20T16:30"], dtype="datetime64[s]"), "notices": ()}
    return WeatherYear(site=PLACE, file="example", format="example", stamp=stamp, **values | given)


def sun_in(*, zenith_deg: float, azimuth_deg: float, dni_extra: float = 1395.8) -> Sun:
    """A sun put there by hand; hour angle and declination play no part on a plane."""
    zenith, azimuth, extra = (np.array([value]) for value in (zenith_deg, azimuth_deg, dni_extra))
    none = np.zeros(1)
    return Sun(
        apparent_zenith_deg=zenith, azimuth_deg=azimuth, dni_extra=extra, hour_angle_deg=none, declination_deg=none
    )


# Reda & Andreas, Solar Position Algorithm, NREL/TP-560-34302 (2004, rev. 2008), Table A5.1: 17 October 2003, 12:30:30 at
# UTC-7, 39.742476 N, 105.1786 W, 1830.14 m, 820 mbar, 11 C, delta T 67 s
ALGORITHM = [
    pytest.param("apparent_zenith_deg", printed("50.11162"), id="zenith"),
    pytest.param("azimuth_deg", printed("194.34024"), id="azimuth"),
    pytest.param("declination_deg", printed("-9.316179"), id="topocentric declination, from memory"),
]


def worked_example() -> Sun:
    instant = np.array(["2003-10-17T19:30:30"], dtype="datetime64[s]")
    return sun_at(instant, site=PLACE, pressure=82_000.0, t_air_degC=11.0)


@pytest.mark.parametrize(("angle", "expected"), ALGORITHM)
def test_position_of_the_sun(angle, expected):
    assert getattr(worked_example(), angle)[0] == expected


def test_incidence_on_the_example_s_plane():
    """Same table: slope 30 deg, turned 10 deg from south to the east."""
    plane = on_plane(hour(), worked_example(), tilt_deg=30.0, azimuth_deg=170.0, albedo=0.0, model="isotropic")
    assert plane.incidence_deg[0] == printed("25.187", claimed=1e-4)


# Spencer (1971), in Duffie & Beckman (DB), Eq. 1.4.1b with 1367 W/m2
DISTANCE = [
    pytest.param("2003-01-01T12", printed("1415", claimed=1.0), id="1 January"),
    pytest.param("2003-06-20T12", printed("1322", claimed=1.0), id="20 June"),
    pytest.param("2003-01-01T12", printed("1414.9"), id="1 January, recomputed"),
    pytest.param("2003-06-20T12", printed("1322.7"), id="20 June, recomputed"),
]


@pytest.mark.parametrize(("instant", "expected"), DISTANCE)
def test_irradiance_outside_the_atmosphere(instant, expected):
    found = sun_at(np.array([instant], dtype="datetime64[s]"), site=PLACE).dni_extra[0]
    assert found * 1367.0 / 1361.0 == expected


# Beam of 1 W/m2 on the horizontal, on a tilted plane, over its own normal strength or over the horizontal. The sun's place
# follows from latitude, declination and hour angle of the example by DB, Eq. 1.6.5 and 1.6.6.
# Zenith, azimuth of the sun; tilt, azimuth of the plane, clockwise from north, all in deg.
BEAM = [
    pytest.param((60.6185, 154.7779), (45, 195), "normal", printed("0.817"), id="DB Example 1.6.1"),
    pytest.param(
        (60.6185, 154.7779), (45, 195), "flat", printed("1.66", claimed=0.01), id="DB Example 1.8.1, from memory"
    ),
    pytest.param((63.4120, 138.4476), (30, 180), "flat", printed("1.61"), id="DB Example 1.8.2, from memory"),
    pytest.param((63.4120, 138.4476), (50, 180), "flat", printed("1.79"), id="DB Example 1.8.3, from memory"),
]


@pytest.mark.parametrize(("sun", "facing", "over", "ratio"), BEAM)
def test_beam_on_a_tilted_plane(sun, facing, over, ratio):
    strength = {"normal": 1.0, "flat": 1.0 / math.cos(math.radians(sun[0]))}[over]
    weather, there = hour(dni=np.array([strength])), sun_in(zenith_deg=sun[0], azimuth_deg=sun[1])
    plane = on_plane(weather, there, tilt_deg=facing[0], azimuth_deg=facing[1], albedo=0.0, model="isotropic")
    assert plane.beam[0] == ratio


# DB, Example 2.15.1: 40 N, 20 February, 9 to 10 h: 1.04 MJ/m2 with a clearness index of 0.445, 0.7961 of it diffuse and
# 0.2439 beam; ground 0.60, plane 60 deg to the south. Totals in MJ/m2.
SKIES = [
    pytest.param("isotropic", printed("1.171"), id="isotropic, as published"),
    pytest.param("hay-davies", printed("1.251"), id="Hay & Davies 1980, recomputed from the published equation"),
    pytest.param("perez", printed("1.3703"), id="Perez et al. 1990, all sites, recomputed from the published equation"),
]


@pytest.mark.parametrize(("model", "total"), SKIES)
def test_total_on_a_tilted_plane(model, total):
    upward = math.cos(math.radians(62.2020))
    sun = sun_in(zenith_deg=62.2020, azimuth_deg=137.6100, dni_extra=1.04 / 0.445 * MJ / upward)
    ghi, dhi, dni = (np.array([value * MJ]) for value in (1.04, 0.7961, 0.2439 / upward))
    weather = hour(ghi=ghi, dhi=dhi, dni=dni)
    plane = on_plane(weather, sun, tilt_deg=60.0, azimuth_deg=180.0, albedo=0.60, model=model)
    assert plane.total[0] / MJ == total


# Recomputed from the published equation, Swinbank, Q. J. R. Meteorol. Soc. 89 (1963) 339
@pytest.mark.parametrize(("t_air", "t_sky"), [(293.15, "277.06"), (300.0, "286.83")])
def test_swinbank(t_air, t_sky):
    assert swinbank_temperature(np.array([t_air]))[0] == printed(t_sky)


# Recomputed from the published equation, Berdahl & Martin, Solar Energy 32 (1984) 663, without the daily term
CLEAR = [(-20.0, "0.6282"), (-5.0, "0.684825"), (0.0, "0.7110"), (10.0, "0.7743"), (25.0, "0.896625")]


@pytest.mark.parametrize(("dew_degC", "emissivity"), CLEAR)
def test_berdahl_martin_emissivity(dew_degC, emissivity):
    assert berdahl_martin_emissivity(t_dew=np.array([dew_degC + zero_Celsius]))[0] == printed(emissivity)


# The same with its daily term: air 293.15 K, dew point 10 C
@pytest.mark.parametrize(("solar_hour", "t_sky"), [(0.0, "276.14"), (12.0, "273.83")])
def test_berdahl_martin_sky(solar_hour, t_sky):
    weather = hour(t_dew=np.array([283.15]))
    assert sky_temperature(weather, solar_hour=np.array([solar_hour]), model="berdahl-martin")[0] == printed(t_sky)


# Recomputed from the published equation, Martin & Berdahl, Solar Energy 33 (1984) 321, coefficients from memory; clear 0.75
@pytest.mark.parametrize(("cloud", "emissivity"), [(0.0, "0.7500"), (0.4, "0.82836"), (1.0, "0.94589")])
def test_martin_berdahl_emissivity(cloud, emissivity):
    found = martin_berdahl_emissivity(clear=np.array([0.75]), cloud=np.array([cloud]), base=2000.0)
    assert found[0] == printed(emissivity)


# Recomputed from the published equation, Brunt, Q. J. R. Meteorol. Soc. 58 (1932) 389, vapour pressure in Pa
@pytest.mark.parametrize(("pressure", "emissivity"), [(1000.0, "0.72555"), (1227.0, "0.74769")])
def test_brunt(pressure, emissivity):
    assert brunt_emissivity(vapour_pressure=np.array([pressure]))[0] == printed(emissivity)


def test_temperature_of_a_black_sky():
    """Recomputed from sigma T^4: 1099.4 W/m2, of which half the last digit is 4 mK."""
    assert longwave_temperature(np.array([1099.4]))[0] == printed("373.15")
