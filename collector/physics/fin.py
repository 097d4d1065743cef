"""Plate, bond, tube and stream: how far the plate stands above the fluid."""

from __future__ import annotations

import math

import numpy as np

from weather.year import Floats

__all__ = ["capacity_ratio_factor", "efficiency_factor", "fin_efficiency", "plate_to_fluid_resistance"]


def fin_efficiency(u_loss: Floats, *, conductivity: float, thickness: float, pitch: float, outer: float) -> Floats:
    """Efficiency of the straight fin between two tubes.

    Parameters
    ----------
    u_loss
        Slope of the collector's loss at the plate's temperature, shape ``(n,)``, above 0 [W/m2K].
    conductivity, thickness
        Of the plate [W/mK, m].
    pitch, outer
        Distance between tubes and their outer diameter [m].

    Returns
    -------
    ndarray
        tanh(M)/M with M = sqrt(U/(k delta)) (W - D)/2, ``(n,)``.

    Notes
    -----
    **Source**: Duffie & Beckman, Eq. 6.5.12; worked in Example 6.5.1.
    """
    m = np.sqrt(u_loss / (conductivity * thickness)) * (0.5 * (pitch - outer))
    small = np.maximum(m, 1e-6)
    return np.asarray(np.tanh(small) / small)


def plate_to_fluid_resistance(
    u_loss: Floats, *, fin: Floats, pitch: float, outer: float, inner: float, bond_resistance: float, h_film: Floats
) -> Floats:
    """Mean plate temperature above the fluid's, over the useful gain.

    This is (1 - F')/(F' U) written so that it stays finite as the loss vanishes.

    Parameters
    ----------
    u_loss
        Slope of the loss, ``(n,)`` [W/m2K].
    fin
        Fin efficiency, ``(n,)``.
    pitch, outer, inner
        Tube distance, outer and inner diameter [m].
    bond_resistance
        Of the bond, per length of tube; 0 is a perfect bond [mK/W].
    h_film
        Film coefficient in the tube, ``(n,)`` [W/m2K].

    Returns
    -------
    ndarray
        Per collector area, ``(n,)`` [m2K/W].

    Notes
    -----
    **Source**: Duffie & Beckman, Eq. 6.5.18, rearranged. The tube wall itself is taken as without resistance.
    """
    spread = (pitch - outer) * (1.0 - fin) / (u_loss * (outer + (pitch - outer) * fin))
    return np.asarray(spread + pitch * (bond_resistance + 1.0 / (math.pi * inner * h_film)))


def efficiency_factor(u_loss: Floats, resistance: Floats) -> Floats:
    """Collector efficiency factor F'.

    Parameters
    ----------
    u_loss
        Slope of the loss, ``(n,)`` [W/m2K].
    resistance
        From the mean plate to the fluid, ``(n,)`` [m2K/W].

    Returns
    -------
    ndarray
        F', ``(n,)``.

    Notes
    -----
    **Source**: Duffie & Beckman, Eq. 6.5.18-6.5.19; worked in Example 6.5.1.
    """
    return np.asarray(1.0 / (1.0 + u_loss * resistance))


def capacity_ratio_factor(u_loss: Floats, *, f_prime: Floats, capacity_rate: Floats) -> Floats:
    """Flow factor F'' = F_R/F', from the exponential rise of temperature along the flow.

    Parameters
    ----------
    u_loss
        Slope of the loss, ``(n,)`` [W/m2K].
    f_prime
        Collector efficiency factor, ``(n,)``.
    capacity_rate
        Mass flow times heat capacity per collector area, ``(n,)`` [W/m2K].

    Returns
    -------
    ndarray
        F'', ``(n,)``.

    Notes
    -----
    **Source**: Duffie & Beckman, Eq. 6.7.5; worked in Example 6.7.1.
    """
    ntu = u_loss * f_prime / capacity_rate
    return np.asarray(-np.expm1(-ntu) / ntu)
