"""Water and glycol mixtures from published correlations."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from collector.physics.fluid_data import GLYCOLS, IF97_REGION_1, R12_08_H, R12_08_HIJ, R15_11_L, R15_11_LIJ
from weather.year import Floats

__all__ = ["FLUIDS", "Liquid", "freezing_point", "liquid", "valid_range", "water"]

SYSTEM_PRESSURE = 0.3e6  # Pa, at which liquid water is evaluated; its boiling point there is 406.7 K
FLUIDS = {
    "water": "IAPWS-IF97 region 1, R12-08 and R15-11 without critical enhancement, liquid at 3 bar, 0 to 130 C",
    "propylene glycol": "Melinder 2010, Properties of Secondary Working Fluids, IIR; mass fraction to 0.6, freezing point to 100 C",
    "ethylene glycol": "Melinder 2010, Properties of Secondary Working Fluids, IIR; mass fraction to 0.6, freezing point to 100 C",
}


class Liquid(NamedTuple):
    """Density [kg/m3], heat capacity [J/kgK], dynamic viscosity [Pa s] and conductivity [W/mK], each ``(n,)``."""

    density: Floats
    heat_capacity: Floats
    viscosity: Floats
    conductivity: Floats


def liquid(name: str, *, mass_fraction: float, t: Floats) -> Liquid:
    """Properties of the fluid in the tubes.

    Parameters
    ----------
    name
        A key of ``FLUIDS``.
    mass_fraction
        Of the glycol, 0 to 0.6; 0 for water.
    t
        Temperature, shape ``(n,)`` [K]. Outside ``valid_range`` the value at the nearer end is returned; the caller counts.

    Returns
    -------
    Liquid
        Never infinite.
    """
    low, high = valid_range(name, mass_fraction=mass_fraction)
    held = np.clip(np.asarray(t, dtype=float), low, high)
    return water(held) if name == "water" else _glycol(name, mass_fraction=mass_fraction, t=held)


def valid_range(name: str, *, mass_fraction: float) -> tuple[float, float]:
    """Temperatures between which the fluid's correlations hold.

    Parameters
    ----------
    name, mass_fraction
        As for ``liquid``.

    Returns
    -------
    tuple of float
        Lowest and highest [K].
    """
    if name == "water":
        return 273.15, 403.15
    return freezing_point(name, mass_fraction=mass_fraction), 373.15


def freezing_point(name: str, *, mass_fraction: float) -> float:
    """Temperature at which the first ice forms.

    Parameters
    ----------
    name, mass_fraction
        As for ``liquid``.

    Returns
    -------
    float
        [K]

    Notes
    -----
    **Source**: Melinder (2010); within 1 K of Lange's Handbook of Chemistry, 15th ed., Table 5.13.
    """
    if name == "water":
        return 273.15
    return float(np.polynomial.polynomial.polyval((mass_fraction - 0.3) / 0.3, GLYCOLS[name]["freezing"][0]))


def _glycol(name: str, *, mass_fraction: float, t: Floats) -> Liquid:
    x, y = (mass_fraction - 0.3) / 0.3, (t - 323.15) / 50.0
    density, capacity, conductivity, log_viscosity = (
        np.polynomial.polynomial.polyval2d(np.full_like(y, x), y, np.array(GLYCOLS[name][key]))
        for key in ("density", "heat capacity", "conductivity", "log viscosity")
    )
    return Liquid(density, capacity, np.exp(log_viscosity), conductivity)


def water(t: Floats, *, pressure: float = SYSTEM_PRESSURE) -> Liquid:
    """Properties of liquid water.

    Parameters
    ----------
    t
        273.15 to 623.15, and below boiling at the pressure, shape ``(n,)`` [K].
    pressure
        [Pa]

    Returns
    -------
    Liquid
        Each ``(n,)``.

    Notes
    -----
    **Source**: IAPWS-IF97 (2007) region 1; IAPWS R12-08; IAPWS R15-11.
    """
    density, heat_capacity = if97_region_1(t, pressure=pressure)
    return Liquid(density, heat_capacity, r12_08_viscosity(t, density=density), r15_11_conductivity(t, density=density))


def if97_region_1(t: Floats, *, pressure: float) -> tuple[Floats, Floats]:
    """Density and isobaric heat capacity of liquid water.

    Parameters
    ----------
    t
        Shape ``(n,)`` [K].
    pressure
        [Pa]

    Returns
    -------
    tuple of ndarray
        [kg/m3] and [J/kgK], each ``(n,)``.

    Notes
    -----
    **Source**: IAPWS-IF97 (2007), Eq. 7 and Tables 2, 3; verification values of Table 5.
    """
    i, j, n = (np.array(column)[:, np.newaxis] for column in zip(*IF97_REGION_1, strict=True))
    tau = 1386.0 / np.asarray(t, dtype=float)
    a, b = 7.1 - pressure / 16.53e6, tau - 1.222
    gamma_pi = np.sum(-n * i * a ** (i - 1.0) * b**j, axis=0)
    gamma_tau_tau = np.sum(n * a**i * j * (j - 1.0) * b ** (j - 2.0), axis=0)
    return 16.53e6 / (461.526 * t * gamma_pi), -461.526 * tau**2 * gamma_tau_tau


def r12_08_viscosity(t: Floats, *, density: Floats) -> Floats:
    """Dynamic viscosity of water, without the critical enhancement.

    Parameters
    ----------
    t, density
        Shape ``(n,)`` [K, kg/m3].

    Returns
    -------
    ndarray
        [Pa s], ``(n,)``.

    Notes
    -----
    **Source**: IAPWS R12-08 (2008), Eq. 10-12; verification values of Table 4.
    """
    t_bar, rho_bar = t / 647.096, density / 322.0
    dilute = 100.0 * np.sqrt(t_bar) / np.polynomial.polynomial.polyval(1.0 / t_bar, R12_08_H)
    return np.asarray(1e-6 * dilute * _dense_factor(t_bar, rho_bar, coefficients=R12_08_HIJ))


def r15_11_conductivity(t: Floats, *, density: Floats) -> Floats:
    """Thermal conductivity of water, without the critical enhancement.

    Parameters
    ----------
    t, density
        Shape ``(n,)`` [K, kg/m3].

    Returns
    -------
    ndarray
        [W/mK], ``(n,)``.

    Notes
    -----
    **Source**: IAPWS R15-11 (2011), Eq. 15-17; verification values of Table 4.
    """
    t_bar, rho_bar = t / 647.096, density / 322.0
    dilute = np.sqrt(t_bar) / np.polynomial.polynomial.polyval(1.0 / t_bar, R15_11_L)
    return np.asarray(1e-3 * dilute * _dense_factor(t_bar, rho_bar, coefficients=R15_11_LIJ))


def _dense_factor(t_bar: Floats, rho_bar: Floats, *, coefficients: tuple[tuple[float, ...], ...]) -> Floats:
    series = np.polynomial.polynomial.polyval2d(1.0 / t_bar - 1.0, rho_bar - 1.0, np.array(coefficients))
    return np.asarray(np.exp(rho_bar * series))
