"""Thin films against an independent public solution of the same equations, and the mixing rules against their own limits."""

from __future__ import annotations

from cmath import inf

import numpy as np
import pytest

from collector.physics.layers import Film, bruggeman_1935, film_stack, hemispherical_spectrum, maxwell_garnett_1904

ANGLES = np.array([0.0, 20.0, 45.0, 60.0, 75.0, 85.0])
SAME = 1e-10  # both solve the same equations in double precision


def random_stack(seed: int):
    """Up to six films, clear and absorbing, of 1 nm to 3 um, from the violet to 20 um; a clear or a metallic base."""
    draw = np.random.default_rng(seed)
    wavelength = np.sort(draw.uniform(0.3e-6, 20e-6, 4))
    films = [
        Film(
            draw.uniform(0.2, 5.0, 4) + 1j * draw.choice([0.0, 1.0]) * draw.uniform(0.0, 5.0, 4),
            draw.uniform(1e-9, 3e-6),
        )
        for _ in range(draw.integers(0, 7))
    ]
    base = draw.uniform(0.2, 10.0, 4) + 1j * draw.choice([0.0, 1.0]) * draw.uniform(0.0, 60.0, 4)
    return wavelength, films, base


@pytest.mark.parametrize("seed", range(50))
def test_reflectance_and_transmittance_of_random_stacks(seed):
    reference = pytest.importorskip("tmm", reason="the independent solution is not installed")
    wavelength, films, base = random_stack(seed)
    ours = film_stack(wavelength, films=films, substrate=base, incidence_deg=ANGLES)
    for place in np.ndindex(ours.reflectance.shape):
        polarisation, angle, at = place
        indices = [1.0, *(film.refractive_index[at] for film in films), base[at]]
        thicknesses = [inf.real, *(film.thickness for film in films), inf.real]
        theirs = reference.coh_tmm("sp"[polarisation], indices, thicknesses, np.radians(ANGLES[angle]), wavelength[at])
        assert ours.reflectance[place] == pytest.approx(theirs["R"], abs=SAME)
        assert ours.transmittance[place] == pytest.approx(theirs["T"], abs=SAME)


def test_quarter_wave_on_glass():
    """A quarter wave of index sqrt(n) takes the reflection away: textbook result of interference."""
    wavelength, glass = np.array([550e-9]), 1.526
    film = Film(np.array([glass**0.5 + 0j]), 550e-9 / 4.0 / glass**0.5)
    found = film_stack(wavelength, films=[film], substrate=np.array([glass + 0j]), incidence_deg=np.zeros(1))
    assert found.reflectance == pytest.approx(np.zeros((2, 1, 1)), abs=1e-12)
    assert found.transmittance == pytest.approx(np.ones((2, 1, 1)), abs=1e-12)


def test_brewsters_angle():
    base = np.array([1.5 + 0j])
    found = film_stack(np.array([1e-6]), films=(), substrate=base, incidence_deg=np.degrees(np.arctan([1.5])))
    assert found.reflectance[1, 0, 0] == pytest.approx(0.0, abs=1e-15)
    assert found.reflectance[0, 0, 0] == pytest.approx(
        ((1.5**2 - 1) / (1.5**2 + 1)) ** 2, abs=1e-15
    )  # Fresnel at that angle


@pytest.mark.parametrize("thickness", [1e-3, 1.0, 1e6])
def test_a_thick_absorbing_film_hides_its_base_without_overflow(thickness):
    wavelength, film = np.array([0.5e-6, 5e-6]), np.array([2.0 + 1.0j, 3.0 + 20.0j])
    base = np.array([1.5 + 0j, 1.5 + 0j])
    over = film_stack(wavelength, films=[Film(film, thickness)], substrate=base, incidence_deg=ANGLES)
    bare = film_stack(wavelength, films=(), substrate=film, incidence_deg=ANGLES)
    assert over.reflectance == pytest.approx(bare.reflectance, abs=1e-14)
    assert over.transmittance == pytest.approx(np.zeros((2, 6, 2)), abs=1e-300)


def test_along_the_plane_everything_is_reflected_and_nothing_divides_by_zero():
    """At 90 deg, also where a film's index is 1 and the wave within runs along it too, or at the critical angle of a thin one."""
    edge = np.degrees(np.arcsin([0.5]))
    for index, angle in ((1.0 + 0j, np.array([90.0])), (0.5 + 0j, edge), (0.5 + 0j, np.array([90.0]))):
        film = Film(np.array([index]), 1e-7)
        found = film_stack(np.array([1e-6]), films=[film], substrate=np.array([1.5 + 3j]), incidence_deg=angle)
        assert np.isfinite(found.reflectance).all()
        assert np.isfinite(found.transmittance).all()
        if angle[0] == 90.0:
            assert found.reflectance == pytest.approx(np.ones((2, 1, 1)), abs=1e-6)


@pytest.mark.parametrize(
    "base", [1.5 + 0j, 2.0 + 2.0j, 10.0 + 60.0j, 100.0 + 100.0j], ids=["glass", "dark", "metal", "far"]
)
def test_directions_enough_for_the_hemisphere(base):
    """The default's 24 against 400, over a bare base: its steep rise at grazing is the hardest case."""
    few, many = (
        1.0
        - hemispherical_spectrum(np.array([1e-5]), films=(), substrate=np.array([base]), angles=angles).reflectance[0]
        for angles in (24, 400)
    )
    assert few == pytest.approx(many, rel=1e-3)


RULES = [maxwell_garnett_1904, bruggeman_1935]
METAL, OXIDE = np.array([3.0 + 4.0j, 20.0 + 60.0j]), np.array([1.65 + 0j, 1.4 + 0.1j])


@pytest.mark.parametrize("rule", RULES)
def test_mixtures_of_nothing_and_of_all(rule):
    assert rule(inclusion=METAL, host=OXIDE, fraction=0.0) == pytest.approx(OXIDE, rel=1e-12)
    assert rule(inclusion=METAL, host=OXIDE, fraction=1.0) == pytest.approx(METAL, rel=1e-12)
    assert rule(inclusion=METAL, host=METAL, fraction=0.4) == pytest.approx(METAL, rel=1e-12)


@pytest.mark.parametrize("fraction", [0.1, 0.33, 0.5, 0.9])
def test_bruggeman_solves_his_equation_and_treats_both_alike(fraction):
    eps = bruggeman_1935(inclusion=METAL, host=OXIDE, fraction=fraction) ** 2
    left = fraction * (METAL**2 - eps) / (METAL**2 + 2 * eps) + (1 - fraction) * (OXIDE**2 - eps) / (OXIDE**2 + 2 * eps)
    assert left == pytest.approx(np.zeros(2), abs=1e-12)
    swapped = bruggeman_1935(inclusion=OXIDE, host=METAL, fraction=1.0 - fraction)
    assert swapped**2 == pytest.approx(eps, rel=1e-12)


def test_the_rules_agree_where_inclusions_are_few():
    """To first order in the fraction they are one rule; of second order is what is left."""
    few = 1e-4
    garnett, bruggeman = (rule(inclusion=METAL, host=OXIDE, fraction=few) for rule in RULES)
    alone = np.abs(garnett - OXIDE)
    assert np.all(np.abs(garnett - bruggeman) < 10.0 * few * alone)


def test_bruggeman_of_a_metal_joins_up_at_one_third():
    """Well above it a mixture of a good metal and a clear oxide conducts, well below it insulates: Bruggeman's threshold."""
    metal, oxide = np.array([50.0 + 200.0j]), np.array([1.65 + 0j])
    below, above = (bruggeman_1935(inclusion=metal, host=oxide, fraction=f)[0] for f in (0.2, 0.5))
    assert below.imag < 0.01
    assert above.imag > 50.0
