"""The script that one would write without the product: scipy's brentq, hour by hour, on the same equations."""

from __future__ import annotations

import math

import numpy as np
from scipy.optimize import brentq

from collector.balance.steady import Uptake
from collector.study.year import Conditions

SIGMA = 5.670374419e-8


def hour_by_hour(conditions: Conditions, uptake: Uptake, hours: np.ndarray) -> np.ndarray:
    """Useful gain of some hours of a collector with one cover, below 55 degrees of tilt."""
    return np.array([_hour(conditions, uptake, int(hour)) for hour in hours])


def _hour(conditions: Conditions, uptake: Uptake, hour: int) -> float:
    network, absorber, stream, feed = (
        conditions.model.network,
        conditions.model.collector.absorber,
        uptake.stream,
        uptake.feed,
    )
    (gap,) = network.gaps
    around = conditions.around
    t_air, h_wind = float(around.t_air[hour]), float(around.h_wind[hour])
    t_sky, t_ground = float(around.t_sky[hour]), float(around.t_ground[hour])
    sun, sun_cover = float(conditions.absorbed.plate[hour]), float(conditions.absorbed.covers[0][hour])
    tilt = math.radians(network.tilt_deg)

    def through_gap(t_cover: float, t_plate: float) -> float:
        x = 0.5 * (t_cover + t_plate) / 300.0
        k = ((9.80276e-4 * x - 6.559526e-3) * x + 3.248843e-2) * x - 5.2476e-4
        mu = ((8.345159e-7 * x - 5.550318e-6) * x + 2.30805e-5) * x + 1.725752e-7
        cp = (35.16308 * x - 58.92965) * x + 1030.228
        density = network.pressure / 287.055
        ra = (
            9.80665
            * density**2
            * cp
            / ((300 * x) ** 3 * mu * k)
            * gap.thickness**3
            * (t_plate - t_cover)
            * math.cos(tilt)
        )
        nu = 1.0
        if ra > 1708.0:
            nu += 1.44 * (1.0 - 1708.0 / ra) * (1.0 - 1708.0 * math.sin(1.8 * tilt) ** 1.6 / ra)
            nu += max((ra / 5830.0) ** (1.0 / 3.0) - 1.0, 0.0)
        return nu * k / gap.thickness * (t_plate - t_cover) + gap.exchange * SIGMA * (t_plate**4 - t_cover**4)

    def cover_balance(t_cover: float, t_plate: float) -> float:
        share, eps = network.sky_share, network.eps_front
        out = h_wind * (t_cover - t_air) + eps * SIGMA * share * (t_cover**4 - t_sky**4)
        out += eps * SIGMA * (1.0 - share) * (t_cover**4 - t_ground**4)
        return through_gap(t_cover, t_plate) + sun_cover - out

    def loss(t_plate: float) -> float:
        t_cover = brentq(cover_balance, 180.0, 600.0, args=(t_plate,), xtol=1e-9)
        return through_gap(t_cover, t_plate) + (network.u_back + network.u_edge) * (t_plate - t_air)

    def useful(t_plate: float) -> float:
        slope = (loss(t_plate + 0.01) - loss(t_plate - 0.01)) / 0.02
        t_mean = t_plate
        for _ in range(3):
            h, c = np.interp(t_mean, stream.t, stream.h_film), np.interp(t_mean, stream.t, stream.capacity_rate)
            m = (
                math.sqrt(slope / (absorber.conductivity * absorber.thickness))
                * 0.5
                * (absorber.pitch - absorber.outer)
            )
            fin, span = math.tanh(m) / m, absorber.pitch - absorber.outer
            resistance = span * (1.0 - fin) / (slope * (absorber.outer + span * fin))
            resistance += absorber.pitch * (absorber.bond_resistance + 1.0 / (math.pi * absorber.inner * h))
            f_prime = 1.0 / (1.0 + slope * resistance)
            f_r = c / slope * (1.0 - math.exp(-slope * f_prime / c))
            q = f_r * slope / (1.0 - f_r) * (t_plate - feed.temperature)
            t_mean = t_plate - q * resistance
        return q

    if sun <= loss(feed.temperature):
        return 0.0
    t_plate = brentq(lambda t: sun - loss(t) - useful(t), feed.temperature, feed.temperature + 300.0, xtol=1e-6)
    return sun - loss(t_plate)
