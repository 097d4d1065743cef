"""Spectra weighted by the sun and by Planck's curve, against printed integrals and closed forms."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from pvlib.spectrum import get_reference_spectra
from scipy.constants import zero_Celsius

from collector.physics.emittance_curve import emittance_function
from collector.physics.layers import film_stack, hemispherical_spectrum, normal_spectrum
from collector.physics.spectrum import (
    SECOND_RADIATION,
    Spectrum,
    band_fraction,
    emittance,
    solar_absorptance,
)
from tests.published.printed import printed, row


@cache
def sunlight(kind: str) -> dict[str, np.ndarray]:
    """ASTM G173-03, wavelength in m and irradiance in W/m2 nm."""
    table = get_reference_spectra(standard="ASTM G173-03")
    return {"wavelength": table.index.to_numpy() * 1e-9, "irradiance": table[kind].to_numpy()}


def step(cut_um: float, *, short: float = 0.95, long: float = 0.05) -> Spectrum:
    """Absorptance one value below the cut-off and another above; the step is a thousand-millionth of the wavelength wide."""
    cut = cut_um * 1e-6
    wavelength = np.array([0.2e-6, cut * (1.0 - 5e-10), cut * (1.0 + 5e-10), 100e-6])
    return Spectrum(wavelength=wavelength, reflectance=1.0 - np.array([short, short, long, long]))


def celsius(*values: float) -> np.ndarray:
    return np.array(values) + zero_Celsius


def test_second_radiation_constant():
    assert printed("0.014387768775") == SECOND_RADIATION  # m K; CODATA 2018 and 2022


# ASTM G173-03: W/m2 from 280 to 4000 nm by the trapezoidal rule. Global and direct as quoted with the standard (direct
# from memory), the extraterrestrial column recomputed from its points
INTEGRALS = [("global", "1000.4"), ("direct", "900.1"), ("extraterrestrial", "1347.9")]


@pytest.mark.parametrize(("kind", "power"), INTEGRALS)
def test_integral_of_the_solar_spectrum(kind, power):
    sun = sunlight(kind)
    assert np.trapezoid(sun["irradiance"], sun["wavelength"] * 1e9) == printed(power)


# Share of the energy below 0.4, 0.78, 1.1, 1.5, 2.0, 2.5, 3.0 um: recomputed from ASTM G173-03 by the trapezoidal rule
BELOW_UM = (0.4, 0.78, 1.1, 1.5, 2.0, 2.5, 3.0)
SHARES = [
    ("global", row("0.046086 0.56649 0.80426 0.89764 0.96278 0.99221 0.99263")),
    ("direct", row("0.033906 0.54234 0.78922 0.88854 0.95900 0.99128 0.99175")),
]


@pytest.mark.parametrize(("kind", "shares"), SHARES)
def test_solar_energy_below_a_wavelength(kind, shares):
    found = [solar_absorptance(step(cut, short=1.0, long=0.0), **sunlight(kind)).value for cut in BELOW_UM]
    assert found == shares


# Blackbody radiation functions, share below lambda T in um K: Cengel & Ghajar, Heat and Mass Transfer, Table 12-2 (the same
# column in Incropera et al., Table 12.1). Made with older constants: it runs up to 5e-5 above the exact series, hence 6e-5.
# Left out: 5200, 11 500 and 15 000 um K, whose third decimal is one too high in the printing seen.
TABLE = [
    (1000.0, "0.000321"),
    (2000.0, "0.066728"),
    (2898.0, "0.250108"),  # from memory
    (3000.0, "0.273232"),
    (4000.0, "0.480877"),
    (5000.0, "0.633747"),
    (6000.0, "0.737818"),
    (8000.0, "0.856288"),
    (10_000.0, "0.914199"),
    (20_000.0, "0.985602"),
    (50_000.0, "0.998953"),
]


@pytest.mark.parametrize(("lambda_t_um", "share"), TABLE)
def test_band_fraction(lambda_t_um, share):
    assert band_fraction(np.array([lambda_t_um * 1e-6]))[0] == printed(share, claimed=6e-5)


# Modest, Radiative Heat Transfer, Ch. 1 (from memory): half of the power lies below 4107 um K
def test_half_of_the_power():
    grid = np.linspace(4000e-6, 4200e-6, 2001)
    assert np.interp(0.5, band_fraction(grid), grid) * 1e6 == printed("4107")


# A step from absorptance 0.95 to 0.05: solar absorptance by definition, recomputed from ASTM G173-03
STEP_ABSORPTANCES = [
    (1.5, "0.85788", "0.84969"),
    (2.0, "0.91650", "0.91310"),
    (2.5, "0.94299", "0.94215"),
    (3.0, "0.94337", "0.94258"),
]


@pytest.mark.parametrize(("cut_um", "in_global", "in_direct"), STEP_ABSORPTANCES)
def test_solar_absorptance_of_a_step(cut_um, in_global, in_direct):
    found = [solar_absorptance(step(cut_um), **sunlight(kind)).value for kind in ("global", "direct")]
    assert found == [printed(in_global), printed(in_direct)]


# The same step's emittance at 50, 100, 150, 200, 300, 400 C: recomputed from 0.05 + 0.90 F(0 to cut-off times T)
STEP_CELSIUS = celsius(50.0, 100.0, 150.0, 200.0, 300.0, 400.0)
STEP_EMITTANCES = [
    (1.5, row("0.05000 0.05000 0.05000 0.050002 0.050042 0.050323")),
    (2.0, row("0.05000 0.050005 0.050034 0.050149 0.051242 0.055171")),
    (2.5, row("0.050017 0.050124 0.050543 0.051679 0.05834 0.074195")),
    (3.0, row("0.050200 0.050981 0.053175 0.057778 0.077432 0.11280")),
]


@pytest.mark.parametrize(("cut_um", "expected"), STEP_EMITTANCES)
def test_emittance_of_a_step(cut_um, expected):
    assert emittance(step(cut_um), t=STEP_CELSIUS).value.tolist() == expected


@pytest.mark.parametrize(("cut_um", "expected"), STEP_EMITTANCES)
def test_emittance_of_a_step_by_the_table_for_a_solver(cut_um, expected):
    """Half of the last printed digit is wider than the error that the table states."""
    curve = emittance_function(step(cut_um))
    assert curve.error < 1e-6
    assert curve(STEP_CELSIUS)[0].tolist() == expected


# All below the cut-off absorbed, none above: recomputed; absorptance in the direct sun, emittance at 400 C
IDEAL = [(2.0, "0.95900", "0.0057452"), (2.5, "0.99128", "0.026883")]


@pytest.mark.parametrize(("cut_um", "absorptance", "at_400"), IDEAL)
def test_ideal_selective_surface(cut_um, absorptance, at_400):
    surface = step(cut_um, short=1.0, long=0.0)
    assert solar_absorptance(surface, **sunlight("direct")).value == printed(absorptance)
    assert emittance(surface, t=celsius(400.0)).value[0] == printed(at_400)


# Normal emittance of copper, recomputed by 4n / ((n + 1)^2 + k^2) from measured n and k. The two sets differ by more than a
# third at the same wavelength: a metal's emittance is its sample's, which is why the base of a stack comes from the user's table.
COPPER = [
    pytest.param(0.7493 + 22.28j, "0.0060009", id="3.10 um, Babar & Weaver, Appl. Opt. 54 (2015) 477"),
    pytest.param(5.134 + 58.62j, "0.0059115", id="8.27 um, Babar & Weaver"),
    pytest.param(11.18 + 85.47j, "0.0059999", id="12.4 um, Babar & Weaver"),
    pytest.param(8.31 + 63.0j, "0.008196", id="10 um, Ordal et al., Appl. Opt. 24 (1985) 4493"),
]


@pytest.mark.parametrize(("index", "expected"), COPPER)
def test_normal_emittance_of_bare_copper(index, expected):
    bare = film_stack(np.array([1e-5]), films=(), substrate=np.array([index]), incidence_deg=np.zeros(1))
    assert (1.0 - bare.reflectance[:, 0, 0]).tolist() == [printed(expected)] * 2


# Soda-lime glass, opaque here: um, n, k; Rubin, Solar Energy Materials 12 (1985) 275, from a public-domain (CC0) collection
GLASS = """
5 1.397 .003  6 1.323 .005  7 1.152 .008  8 .939 .028  8.2 .822 .061  8.4 .624 .216  8.5 .613 .354  8.7 .684 .543
9 .736 .759  9.2 .812 .938  9.4 .971 1.123  9.5 1.085 1.187  9.6 1.209 1.232  9.8 1.479 1.24  10 1.707 1.123
10.5 1.956 .809  11 1.994 .485  11.5 1.864 .286  12 1.733 .222  12.5 1.612 .244  13 1.606 .306  13.5 1.615 .304
14 1.615 .28  14.5 1.558 .269  15 1.554 .299  15.5 1.546 .288  16 1.511 .278  16.5 1.468 .288  17 1.433 .309
17.5 1.401 .322  18 1.328 .329  18.5 1.216 .382  19 1.108 .521  19.5 1.069 .76  20 1.177 .966  21 1.519 1.223
22 1.931 1.216  23 2.196 .988  24 2.263 .746  25 2.223 .582  27 2.139 .462  30 2.035 .381  35 1.96 .421  40 1.969 .487
45 2.033 .538  50 2.099 .545  60 2.199 .536  70 2.274 .515  80 2.333 .493  90 2.384 .47  100 2.426 .445  150 2.547 .326
200 2.592 .242  300 2.608 .152
"""
# EN 12898 and EN 673 for uncoated glass at 283 K (from memory). The second is 0.89 times a ratio of 0.94; half of the last
# digit of both together is good to 0.006.
GLASS_EMITTANCES = [
    pytest.param(normal_spectrum, printed("0.89"), id="normal"),
    pytest.param(hemispherical_spectrum, printed("0.837", claimed=0.006), id="hemispherical"),
]


@pytest.mark.parametrize(("spectrum_of", "expected"), GLASS_EMITTANCES)
def test_emittance_of_window_glass(spectrum_of, expected):
    um, n, k = np.array(GLASS.split(), dtype=float).reshape(-1, 3).T
    grid = np.geomspace(um[0], um[-1], 800)
    index = np.interp(grid, um, n + 1j * k)
    found = emittance(spectrum_of(grid * 1e-6, films=(), substrate=index), t=np.array([283.0]))
    assert found.value[0] == expected
    assert found.short[0] + found.long[0] < 0.01  # of Planck's curve lies beyond the table
