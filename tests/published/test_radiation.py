"""Long-wave exchange against handbook values, worked there with 5.67e-8 W/m2K4, 0.007 % below the constant in use."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.constants import atm, zero_Celsius

from collector.balance.losses import network_of
from collector.balance.optics import absorbed_power, optics_of
from collector.physics.radiation import SIGMA, parallel_plates_factor, radiative_flux, sky_view_factor
from tests.published.printed import printed
from tests.published.textbook import around, collector, linearised
from weather.plane import PlaneIrradiance


def kelvins(*values: float) -> list[np.ndarray]:
    return [np.array([value]) for value in values]


def sunlight(*, beam: float = 0.0, diffuse: float = 0.0, incidence_deg: float = 0.0) -> PlaneIrradiance:
    beam_on_plane = beam * np.cos(np.radians(incidence_deg))
    beams, sky, none, angle = kelvins(beam_on_plane, diffuse, 0.0, incidence_deg)
    return PlaneIrradiance(beam=beams, sky=sky, horizon=none, ground=none, incidence_deg=angle, notices=())


def absorbed_in_plate(build, light: PlaneIrradiance) -> float:
    return absorbed_power(optics_of(build), light).plate[0]


def test_constant_of_stefan_and_boltzmann():
    assert printed("5.670374419e-8") == SIGMA  # CODATA 2018 and 2022


# Cengel & Ghajar, Heat and Mass Transfer: Sec. 9-5 for the panes; the others recomputed from 1/(1/e1 + 1/e2 - 1)
PLATES = [
    pytest.param(0.84, 0.84, printed("0.72"), id="two panes of glass"),
    pytest.param(0.84, 0.84, printed("0.7241"), id="two panes of glass, recomputed"),
    pytest.param(1.0, 0.3, printed("0.3000"), id="black against grey is the grey one's own, recomputed"),
]


@pytest.mark.parametrize(("eps_1", "eps_2", "factor"), PLATES)
def test_exchange_factor_of_parallel_plates(eps_1, eps_2, factor):
    assert parallel_plates_factor(eps_1, eps_2) == factor


# Kelvins of the two faces, their exchange factor, flux in W/m2
FLUXES = [
    pytest.param(800.0, 500.0, parallel_plates_factor(0.2, 0.7), printed("3625", claimed=2.0), id="CG Example 13-7"),
    pytest.param(373.15, 0.0, 1.0, printed("1099.4"), id="black, 100 C to 0 K, recomputed from sigma T^4"),
]


@pytest.mark.parametrize(("t_from", "t_to", "factor", "expected"), FLUXES)
def test_flux_between_two_faces(t_from, t_to, factor, expected):
    flux, _, _ = radiative_flux(*kelvins(t_from, t_to), factor=factor)
    assert flux[0] == expected


# Cengel & Ghajar, Example 12-6: 400 W/m2 of beam at 20 deg and 300 of diffuse on a plate at 320 K under a sky of 260 K,
# all reflected long wave lost; net heat in W/m2 by solar absorptance and emittance
SURFACES = [
    pytest.param(0.9, 0.9, printed("307", claimed=1.0), id="a: grey absorber"),
    pytest.param(0.1, 0.1, printed("34", claimed=1.0), id="b: grey reflector"),
    pytest.param(0.9, 0.1, printed("575", claimed=1.0), id="c: selective absorber"),
    pytest.param(0.1, 0.9, printed("-234", claimed=1.0), id="d: selective reflector"),
]


@pytest.mark.parametrize(("absorptance", "emittance", "net"), SURFACES)
def test_net_radiation_of_a_surface_in_the_sun(absorptance, emittance, net):
    build = collector(absorptance=absorptance, emittance=emittance)
    gained = absorbed_in_plate(build, sunlight(beam=400.0, diffuse=300.0, incidence_deg=20.0))
    lost, _, _ = radiative_flux(*kelvins(320.0, 260.0), factor=emittance)
    assert gained - lost[0] == net


# Incropera et al., Fundamentals of Heat and Mass Transfer, Example 12.11 (result from memory): a bare selective plate at
# 120 C in 750 W/m2, air 30 C, sky -10 C, free convection 0.22 (90 K)^(1/3) W/m2K; 273 and not 273.15 in the book
BARE = [
    pytest.param(1.0, printed("516", claimed=1.5), id="useful heat, W/m2"),
    pytest.param(750.0, printed("0.69", claimed=0.005), id="efficiency"),
]


@pytest.mark.parametrize(("over", "expected"), BARE)
def test_useful_heat_of_a_bare_selective_plate(over, expected):
    build = collector(absorptance=0.95, emittance=0.1)
    celsius = around(t_air=30.0 + zero_Celsius, t_sky=-10.0 + zero_Celsius, h_wind=0.22 * 90.0 ** (1.0 / 3.0))
    losses = linearised(network_of(build, pressure=atm), celsius, nodes=[120.0 + zero_Celsius]).losses
    assert (absorbed_in_plate(build, sunlight(beam=750.0)) - losses.total[0]) / over == expected


# Liu & Jordan, Solar Energy 7 (1963) 53: recomputed from (1 + cos tilt)/2
VIEWS = [(0.0, "1.0000"), (45.0, "0.8536"), (60.0, "0.7500"), (90.0, "0.5000")]


@pytest.mark.parametrize(("tilt_deg", "share"), VIEWS)
def test_view_of_the_sky(tilt_deg, share):
    assert sky_view_factor(tilt_deg) == printed(share)
