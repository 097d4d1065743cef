"""Temperature at which the sky radiates, by the relation of your choice."""

from __future__ import annotations

import numpy as np
from scipy.constants import Stefan_Boltzmann, zero_Celsius

from weather.errors import InputError, Problem
from weather.year import Floats, WeatherYear

__all__ = [
    "DEW_POINT_RANGE",
    "MODELS",
    "NEEDS",
    "available_models",
    "berdahl_martin_emissivity",
    "brunt_emissivity",
    "longwave_temperature",
    "magnus_vapour_pressure",
    "martin_berdahl_emissivity",
    "sky_temperature",
    "swinbank_temperature",
]

MODELS = {
    "berdahl-martin": "clear sky from dew point and hour; Berdahl & Martin 1984, Solar Energy 32, 663",
    "martin-berdahl": "the same with opaque cloud at 2000 m; Martin & Berdahl 1984, Solar Energy 33, 321",
    "brunt": "clear sky from vapour pressure; Brunt 1932, Q. J. R. Meteorol. Soc. 58, 389",
    "swinbank": "clear sky from air temperature alone; Swinbank 1963, Q. J. R. Meteorol. Soc. 89, 339",
    "measured": "the weather file's own long-wave column",
    "ambient": "sky as warm as the air: a bound, not a relation",
}
NEEDS = {
    "berdahl-martin": ("t_dew",),
    "martin-berdahl": ("t_dew", "cloud"),
    "brunt": ("t_dew",),
    "measured": ("longwave",),
}
COLUMNS = {"t_dew": "dew point", "cloud": "cloud cover", "longwave": "long-wave irradiance"}
DEW_POINT_RANGE = (260.15, 297.15)  # K, of the fits to dew point; from memory
CLOUD_BASE = 2000.0  # m, assumed for opaque cloud
CLOUD_SCALE = 8200.0  # m, Martin & Berdahl 1984


def sky_temperature(weather: WeatherYear, *, solar_hour: Floats, model: str, pressure_term: bool = False) -> Floats:
    """Sky temperature of every hour.

    Parameters
    ----------
    weather
        n hours.
    solar_hour
        Solar time at mid-hour, from midnight, ``(n,)`` [h].
    model
        A key of ``MODELS``.
    pressure_term
        Add the altitude term to the clear-sky emissivity of Berdahl & Martin.

    Returns
    -------
    ndarray
        ``(n,)`` [K].

    Raises
    ------
    InputError
        The file lacks a column that the model needs.
    """
    missing = [COLUMNS[name] for name in NEEDS.get(model, ()) if getattr(weather, name) is None]
    if missing:
        allowed = ", ".join(available_models(weather))
        what = f"sky model '{model}' needs {' and '.join(missing)}, which the file does not have throughout"
        raise InputError(Problem(where=weather.file, what=what, allowed=allowed, do="choose another models.sky"))
    if model == "ambient":
        return weather.t_air
    if model == "swinbank":
        return swinbank_temperature(weather.t_air)
    if model == "measured":
        return longwave_temperature(_column(weather.longwave))
    return weather.t_air * _emissivity(weather, solar_hour, model, pressure_term=pressure_term) ** 0.25


def available_models(weather: WeatherYear) -> list[str]:
    """Sky models whose columns the file has.

    Parameters
    ----------
    weather
        A year.

    Returns
    -------
    list of str
        Keys of ``MODELS``.
    """
    return [model for model in MODELS if all(getattr(weather, name) is not None for name in NEEDS.get(model, ()))]


def _column(values: Floats | None) -> Floats:
    assert values is not None  # noqa: S101 # the caller has just refused files without the column
    return values


def _emissivity(weather: WeatherYear, solar_hour: Floats, model: str, *, pressure_term: bool) -> Floats:
    t_dew = _column(weather.t_dew)
    if model == "brunt":
        return brunt_emissivity(vapour_pressure=magnus_vapour_pressure(t_dew))
    pressure = weather.pressure if pressure_term else None
    clear = berdahl_martin_emissivity(t_dew=t_dew, solar_hour=solar_hour, pressure=pressure)
    return clear if model == "berdahl-martin" else martin_berdahl_emissivity(clear=clear, cloud=_column(weather.cloud))


def berdahl_martin_emissivity(
    *, t_dew: Floats, solar_hour: Floats | None = None, pressure: float | None = None
) -> Floats:
    """Emissivity of a clear sky.

    Parameters
    ----------
    t_dew
        Dew point, ``(n,)`` [K]. The fit covers -13 to 24 C (from memory).
    solar_hour
        From midnight, ``(n,)`` [h]; None leaves the daily term out.
    pressure
        Adds the altitude term if given [Pa]. Against the measured sky of a high, dry site it made things worse, so it is
        not on by default (``tests/measured``).

    Returns
    -------
    ndarray
        At most 1, ``(n,)``.

    Notes
    -----
    **Source**: Berdahl & Martin, Solar Energy 32 (1984) 663.
    """
    hundreds = (t_dew - zero_Celsius) / 100.0
    emissivity = 0.711 + 0.56 * hundreds + 0.73 * hundreds**2
    if solar_hour is not None:
        emissivity = emissivity + 0.013 * np.cos(2.0 * np.pi * solar_hour / 24.0)
    if pressure is not None:
        emissivity = emissivity + 0.00012 * (pressure / 100.0 - 1000.0)
    return np.asarray(np.minimum(emissivity, 1.0))


def martin_berdahl_emissivity(*, clear: Floats, cloud: Floats, base: float = CLOUD_BASE) -> Floats:
    """Emissivity of a sky with opaque cloud.

    Parameters
    ----------
    clear
        Clear-sky emissivity, ``(n,)``.
    cloud
        Opaque cloud cover, fraction, ``(n,)``.
    base
        Height of the cloud's base, assumed where no file says [m].

    Returns
    -------
    ndarray
        ``(n,)``.

    Notes
    -----
    **Source**: Martin & Berdahl, Solar Energy 33 (1984) 321; cloud emissivity 1.
    """
    return np.asarray(clear + (1.0 - clear) * cloud * np.exp(-base / CLOUD_SCALE))


def brunt_emissivity(*, vapour_pressure: Floats) -> Floats:
    """Emissivity of a clear sky, 0.52 + 0.065 sqrt(e).

    Parameters
    ----------
    vapour_pressure
        ``(n,)`` [Pa].

    Returns
    -------
    ndarray
        ``(n,)``.

    Notes
    -----
    **Source**: Brunt (1932), coefficients for e in hPa.
    """
    return 0.52 + 0.065 * np.sqrt(vapour_pressure / 100.0)


def magnus_vapour_pressure(t_dew: Floats) -> Floats:
    """Vapour pressure of the air from its dew point, over water.

    Parameters
    ----------
    t_dew
        ``(n,)`` [K].

    Returns
    -------
    ndarray
        ``(n,)`` [Pa].

    Notes
    -----
    **Source**: Magnus form with the coefficients of WMO No. 8 (17.62, 243.12 C, 6.112 hPa).
    """
    celsius = t_dew - zero_Celsius
    return np.asarray(611.2 * np.exp(17.62 * celsius / (243.12 + celsius)))


def swinbank_temperature(t_air: Floats) -> Floats:
    """Clear-sky temperature 0.0552 T^1.5.

    Parameters
    ----------
    t_air
        ``(n,)`` [K].

    Returns
    -------
    ndarray
        ``(n,)`` [K].

    Notes
    -----
    **Source**: Swinbank (1963).
    """
    return 0.0552 * t_air**1.5


def longwave_temperature(longwave: Floats) -> Floats:
    """Temperature of a black sky of the same long-wave irradiance.

    Parameters
    ----------
    longwave
        On the horizontal, ``(n,)`` [W/m2].

    Returns
    -------
    ndarray
        ``(n,)`` [K].

    Notes
    -----
    **Source**: Stefan-Boltzmann law.
    """
    return np.asarray((longwave / Stefan_Boltzmann) ** 0.25)
