"""Two laws of temperature that coatings live by: a black body's power over wavelength, and the speed of ageing."""

from __future__ import annotations

import numpy as np
from scipy.constants import c, h, k, pi

from weather.year import Floats

__all__ = ["arrhenius_1889", "planck_1901"]

GAS_CONSTANT = 8.314462618  # J/mol K, CODATA
LARGEST_EXPONENT = 700.0  # above it the exponential overflows, and the power is nothing


def planck_1901(wavelength: Floats, *, t: float) -> Floats:
    """Power per area and wavelength that a black body sends into its hemisphere.

    Parameters
    ----------
    wavelength
        Above 0, shape ``(n,)`` [m].
    t
        Temperature [K].

    Returns
    -------
    ndarray
        ``(n,)`` [W/m3]; its integral over all wavelengths is sigma t^4.

    Notes
    -----
    **Source**: Planck, Ann. Phys. 309 (1901) 553, e.g. Siegel & Howell, Thermal Radiation Heat Transfer, Ch. 1.
    """
    exponent = np.minimum(h * c / (wavelength * k * t), LARGEST_EXPONENT)
    return np.asarray(2.0 * pi * h * c**2 / (wavelength**5 * np.expm1(exponent)))


def arrhenius_1889(t: Floats, *, reference: float, activation: float) -> Floats:
    """Speed of a reaction over its speed at a reference temperature.

    Parameters
    ----------
    t
        Temperatures, any shape [K].
    reference
        Reference temperature [K].
    activation
        Activation energy [J/mol].

    Returns
    -------
    ndarray
        exp(E/R (1/reference - 1/t)), in the shape of ``t``.

    Notes
    -----
    **Source**: Arrhenius, Z. Phys. Chem. 4 (1889) 226; for solar absorbers Carlsson, Moeller et al. 2000 (IEA SHC Task X, from
    memory) and ISO 22975-3:2014 (from memory).
    """
    return np.asarray(np.exp(activation / GAS_CONSTANT * (1.0 / reference - 1.0 / t)))
