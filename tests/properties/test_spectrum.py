"""Identities of surfaces and thin films in sunlight and in their own radiation, over the physical range."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import c, h, k
from scipy.integrate import quad

from collector.physics.emittance_curve import emittance_function
from collector.physics.layers import (
    Film,
    bruggeman_1935,
    film_stack,
    hemispherical_of_normal,
    hemispherical_spectrum,
    maxwell_garnett_1904,
)
from collector.physics.spectrum import (
    Spectrum,
    band_fraction,
    cut_off,
    emittance,
    solar_absorptance,
)

TEMPERATURES = np.linspace(230.0, 700.0, 12)
SUN = {"wavelength": np.linspace(0.28e-6, 4e-6, 50), "irradiance": np.exp(-(np.linspace(-2.0, 6.0, 50) ** 2) / 8.0)}
CLOSE = 1e-9  # rounding in sums over a few dozen segments


def spectrum(points: list[tuple[float, float]]) -> Spectrum:
    wavelength, reflectance = np.array(sorted(points)).T
    return Spectrum(wavelength=wavelength * 1e-6, reflectance=reflectance)


points = st.lists(st.tuples(st.floats(0.25, 60.0), st.floats(0.0, 1.0)), min_size=2, max_size=30)
spectra = points.filter(lambda p: np.diff(sorted(x for x, _ in p)).min() > 1e-6).map(spectrum)
clear = st.floats(1.0, 4.0)
indices = st.tuples(st.floats(0.2, 8.0), st.floats(0.0, 40.0)).map(lambda nk: complex(*nk))
films = st.lists(st.tuples(indices, st.floats(1e-9, 3e-6)), max_size=5)
ANGLES = np.linspace(0.0, 90.0, 19)
WAVELENGTH = np.array([0.4e-6, 2e-6, 10e-6])


def stack(layers, base: complex):
    built = [Film(np.full(3, index), thickness) for index, thickness in layers]
    return film_stack(WAVELENGTH, films=built, substrate=np.full(3, base), incidence_deg=ANGLES)


@given(spectra)
def test_a_surface_absorbs_and_radiates_between_its_least_and_its_most(surface):
    least, most = surface.absorptance.min(), surface.absorptance.max()
    taken, given_off = solar_absorptance(surface, **SUN), emittance(surface, t=TEMPERATURES)
    assert least - CLOSE <= taken.value <= most + CLOSE
    assert np.all((given_off.value >= least - CLOSE) & (given_off.value <= most + CLOSE))


@given(spectra)
def test_what_lies_outside_the_range_is_a_share_and_bounds_the_value(surface):
    taken, given_off = solar_absorptance(surface, **SUN), emittance(surface, t=TEMPERATURES)
    inside = band_fraction(surface.wavelength[-1] * TEMPERATURES) - band_fraction(surface.wavelength[0] * TEMPERATURES)
    assert given_off.short + inside + given_off.long == pytest.approx(np.ones(12), abs=1e-12)
    assert given_off.most - given_off.least == pytest.approx(given_off.short + given_off.long, abs=CLOSE)
    assert np.all((given_off.least <= given_off.value + CLOSE) & (given_off.value <= given_off.most + CLOSE))
    assert 0.0 <= taken.least <= taken.value + CLOSE <= taken.most + 2.0 * CLOSE <= 1.0 + 2.0 * CLOSE
    assert taken.most - taken.least == pytest.approx(taken.short + taken.long, abs=CLOSE)


@given(st.floats(0.0, 1.0))
def test_a_grey_surface_is_grey_at_any_temperature(reflectance):
    surface = spectrum([(0.3, reflectance), (2.0, reflectance), (20.0, reflectance)])
    assert emittance(surface, t=TEMPERATURES).value == pytest.approx(np.full(12, 1.0 - reflectance), abs=1e-12)
    assert solar_absorptance(surface, **SUN).value == pytest.approx(1.0 - reflectance, abs=1e-12)


@given(spectra)
def test_a_surface_and_its_negative_make_a_black_one(surface):
    negative = Spectrum(wavelength=surface.wavelength, reflectance=surface.absorptance)
    both = emittance(surface, t=TEMPERATURES).value + emittance(negative, t=TEMPERATURES).value
    assert both == pytest.approx(np.ones(12), abs=CLOSE)


@given(spectra)
def test_the_emittance_of_a_short_wave_absorber_rises_with_temperature(surface):
    falling = Spectrum(wavelength=surface.wavelength, reflectance=np.sort(surface.reflectance))
    assert np.all(np.diff(emittance(falling, t=TEMPERATURES).value) >= -CLOSE)


@given(spectra, st.floats(230.0, 700.0))
@settings(max_examples=20)
def test_emittance_is_the_integral_that_it_stands_for(surface, t):
    """By an adaptive rule over hc/(lambda k T), which shares nothing with the closed form; from segment to segment."""

    def weighted(x: float) -> float:
        wavelength = h * c / (k * t * x)
        return np.interp(wavelength, surface.wavelength, surface.absorptance) * x**3 / np.expm1(x) * 15.0 / np.pi**4

    ends = np.concatenate(([1e-9], h * c / (k * t * surface.wavelength[::-1]), [200.0]))
    ends = np.unique(ends.clip(1e-9, 200.0))
    parts = [quad(weighted, a, b, epsabs=1e-10, limit=200)[0] for a, b in pairwise(ends)]
    assert emittance(surface, t=np.array([t])).value[0] == pytest.approx(sum(parts), abs=1e-7)


@given(st.floats(1e-4, 0.5))
def test_band_fraction_is_the_integral_of_planck(lambda_t):
    share = quad(lambda x: x**3 / np.expm1(x), h * c / (k * lambda_t), 300.0, epsabs=1e-13)[0] * 15.0 / np.pi**4
    assert band_fraction(np.array([lambda_t]))[0] == pytest.approx(share, abs=1e-9)


def test_band_fraction_runs_from_0_to_1_without_a_break():
    grid = np.concatenate(([0.0], np.geomspace(1e-6, 1e3, 20_001), [np.inf]))
    shares = band_fraction(grid)
    assert shares[0] == pytest.approx(0.0, abs=1e-290)  # exp(-700), at which the exponent is held
    assert shares[-1] == 1.0
    assert np.all(np.diff(shares) >= -1e-13)
    assert band_fraction(grid[7000:7001])[0] == shares[7000]
    seam = h * c / (2.0 * k) * (1.0 + np.array([-1e-13, 1e-13]))  # where one series takes over from the other
    assert np.ptp(band_fraction(seam)) < 1e-12


@given(spectra)
@settings(max_examples=30)
def test_the_table_for_a_solver_keeps_to_the_exact_emittance(surface):
    """As near as its docstring says; its slope is the slope."""
    curve = emittance_function(surface)
    between = np.linspace(230.0, 700.0, 379)
    value, slope = curve(between)
    assert curve.error <= 1e-6
    assert value == pytest.approx(emittance(surface, t=between).value, abs=1e-6)
    around = [emittance(surface, t=between + nudge).value for nudge in (-0.05, 0.05)]
    assert slope == pytest.approx((around[1] - around[0]) / 0.1, abs=1e-6)


def test_beyond_the_table_the_end_value_is_held_and_told():
    curve = emittance_function(spectrum([(0.3, 0.05), (2.0, 0.1), (3.0, 0.9), (25.0, 0.95)]))
    t = np.array([100.0, 229.9, 230.0, 700.0, 700.1, 5000.0])
    value, slope = curve(t)
    assert curve.outside(t).tolist() == [True, True, False, False, True, True]
    assert value[:2].tolist() == [value[2]] * 2
    assert value[4:].tolist() == [value[3]] * 2
    assert slope[[0, 1, 4, 5]].tolist() == [0.0] * 4
    assert slope[3] > 0.0


def test_a_step_is_as_sharp_as_it_is_given():
    """Ever narrower steps tend to one value; the closed form must not cancel itself away."""
    found = []
    for width in (1e-3, 1e-6, 1e-9, 1e-12):
        step = spectrum([(0.3, 0.05), (3.0 * (1 - width), 0.05), (3.0 * (1 + width), 0.95), (30.0, 0.95)])
        found.append(emittance(step, t=np.array([400.0])).value[0])
    exact = 0.05 + 0.9 * band_fraction(np.array([1200e-6]))[0]
    assert found[1:] == pytest.approx([exact] * 3, abs=1e-10)
    assert found[0] == pytest.approx(exact, abs=1e-6)


def test_where_a_surface_turns_bright():
    assert cut_off(
        spectrum([(0.3, 0.9), (0.35, 0.1), (2.0, 0.3), (3.0, 0.7), (9.0, 0.4), (12.0, 0.9)])
    ) == pytest.approx(2.5e-6)
    assert cut_off(spectrum([(0.3, 0.05), (30.0, 0.2)])) is None
    assert cut_off(spectrum([(0.3, 0.9), (30.0, 0.95)])) is None  # bright from the start


@given(films, indices)
def test_what_goes_into_a_stack_is_reflected_absorbed_or_let_into_the_base(layers, base):
    found = stack(layers, base)
    for share in (found.reflectance, found.transmittance, 1.0 - found.reflectance - found.transmittance):
        assert np.all((share >= -1e-9) & (share <= 1.0 + 1e-9))


@given(st.lists(st.tuples(clear, st.floats(1e-9, 3e-6)), max_size=5), clear)
def test_clear_films_absorb_nothing(layers, base):
    found = stack([(complex(n), thickness) for n, thickness in layers], complex(base))
    assert found.reflectance + found.transmittance == pytest.approx(np.ones((2, 19, 3)), abs=1e-9)


@given(films, indices, indices)
def test_a_film_of_no_thickness_and_a_film_of_its_base_are_not_seen(layers, base, other):
    plain = stack(layers, base)
    for more in ([*layers, (base, 2e-7)], [*layers, (other, 0.0)]):
        assert stack(more, base).reflectance == pytest.approx(plain.reflectance, abs=1e-9)


@given(films, indices)
def test_at_normal_incidence_the_polarisations_are_one(layers, base):
    found = stack(layers, base)
    assert found.reflectance[0, 0] == pytest.approx(found.reflectance[1, 0], abs=1e-12)


@given(indices, indices, st.floats(0.0, 1.0))
def test_a_mixture_of_passive_materials_is_passive(inclusion, host, fraction):
    for rule in (maxwell_garnett_1904, bruggeman_1935):
        mixed = rule(inclusion=np.array([inclusion]), host=np.array([host]), fraction=fraction)[0]
        assert np.isfinite(mixed)
        assert mixed.real >= 0.0
        assert (mixed**2).imag >= -1e-9 * abs(mixed) ** 2


@given(clear, clear, st.floats(0.0, 1.0))
def test_a_mixture_of_clear_materials_lies_between_the_bounds_of_wiener(inclusion, host, fraction):
    """In series and in parallel: Wiener 1912; no mixture of the two can lie outside."""
    eps = np.array([inclusion, host]) ** 2
    share = np.array([fraction, 1.0 - fraction])
    for rule in (maxwell_garnett_1904, bruggeman_1935):
        mixed = rule(inclusion=np.array([inclusion + 0j]), host=np.array([host + 0j]), fraction=fraction)[0] ** 2
        assert mixed.imag == pytest.approx(0.0, abs=1e-12)
        assert 1.0 / (share / eps).sum() - 1e-9 <= mixed.real <= (share * eps).sum() + 1e-9


@given(st.floats(1.4, 1e4))
def test_hemispherical_of_normal_is_the_integral_over_a_metal(n):
    """A base of n = k, at any wavelength; 200 directions resolve its rise at grazing to better than 1e-4."""
    base = np.array([complex(n, n)])
    hemispherical = 1.0 - hemispherical_spectrum(np.array([1e-5]), films=(), substrate=base, angles=200).reflectance[0]
    found, held = hemispherical_of_normal(np.array([4.0 * n / ((n + 1.0) ** 2 + n**2)]))
    if not held[0]:
        assert found[0] == pytest.approx(hemispherical, rel=2e-4)


def test_hemispherical_of_normal_at_its_ends():
    """4/3 as the emittance goes to 0: 1/3 from the cosine of one polarisation, 1 from its inverse for the other."""
    found, held = hemispherical_of_normal(np.array([0.0, 1e-5, 0.5, 0.51, 0.92, 1.0]))
    assert found[1] / 1e-5 == pytest.approx(4.0 / 3.0, rel=1e-3)
    assert found[0] == 0.0
    assert held.tolist() == [False, False, False, True, True, True]
    assert found[3:].tolist() == [0.51, 0.92, 1.0]
    rising, _ = hemispherical_of_normal(np.linspace(0.0, 1.0, 1001))
    assert np.all(np.diff(rising) > 0.0)
