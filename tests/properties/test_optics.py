"""Identities of light through covers, over the whole physical range."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from collector.balance.optics import absorbed_power, optics_of
from collector.build.collector import Cover
from collector.physics.glazing import fresnel_slab, slab_from_normal, stack_of_slabs
from tests.builds import collector, light

ANGLES = np.linspace(0.0, 90.0, 91)
slabs = st.lists(st.tuples(st.floats(1.0, 2.5), st.floats(0.0, 2.0)), min_size=1, max_size=3)


@given(slabs)
def test_shares_of_a_stack_are_shares(given_slabs):
    stack = stack_of_slabs([fresnel_slab(ANGLES, refractive_index=n, absorption=kl) for n, kl in given_slabs])
    for share in (stack.transmittance, stack.reflectance_below, *stack.absorbed, *stack.absorbed_below):
        assert np.all((share >= -1e-12) & (share <= 1.0 + 1e-12))
    assert np.all(stack.transmittance + stack.absorbed.sum(axis=0) <= 1.0 + 1e-12)


@given(slabs)
def test_a_stack_lets_as_much_through_from_either_side(given_slabs):
    layers = [fresnel_slab(ANGLES, refractive_index=n, absorption=kl) for n, kl in given_slabs]
    down, up = stack_of_slabs(layers), stack_of_slabs(layers[::-1])
    assert down.transmittance == pytest.approx(up.transmittance, abs=1e-12)


@given(slabs)
def test_what_goes_in_from_below_is_reflected_absorbed_or_let_through(given_slabs):
    layers = [fresnel_slab(ANGLES, refractive_index=n, absorption=kl) for n, kl in given_slabs]
    stack = stack_of_slabs(layers)
    out = stack.reflectance_below + stack.absorbed_below.sum(axis=0) + stack.transmittance
    assert out == pytest.approx(np.ones(91), abs=1e-12)


@given(st.floats(1.0, 2.5), st.floats(0.0, 1.5))
def test_normal_values_give_back_the_slab(n, kl):
    slab = fresnel_slab(np.zeros(1), refractive_index=n, absorption=kl)
    transmittance, reflectance = float(slab.transmittance[0, 0]), float(slab.reflectance[0, 0])
    found = slab_from_normal(transmittance=transmittance, reflectance=reflectance)
    assert found == pytest.approx((n, kl), abs=1e-6)


@given(
    st.lists(st.tuples(st.floats(1.2, 1.7), st.floats(0.0, 0.3)), max_size=3),
    st.floats(0.05, 1.0),
    st.floats(0.0, 90.0),
    st.booleans(),
)
def test_plate_and_covers_never_absorb_more_than_there_is(layers, absorptance, tilt, falling):
    covers = tuple(Cover(refractive_index=n, absorption=kl, emittance=0.88, gap=0.02) for n, kl in layers)
    built = collector(absorptance=absorptance, tilt_deg=tilt, falling_absorptance=falling)
    built = type(built)(**{**vars(built), "covers": covers})
    sun = light(beam=np.full(91, 500.0), sky=100.0, horizon=20.0, ground=30.0, incidence_deg=ANGLES)
    power = absorbed_power(optics_of(built), sun)
    assert np.all(power.plate >= 0.0)
    assert np.all(power.plate + power.covers.sum(axis=0) <= sun.total + 1e-9)


def test_an_opaque_cover_leaves_the_plate_dark():
    built = collector(absorptance=0.95)
    black = Cover(refractive_index=1.526, absorption=50.0, emittance=0.88, gap=0.025)
    built = type(built)(**{**vars(built), "covers": (black,)})
    assert absorbed_power(optics_of(built), light(beam=800.0)).plate[0] == pytest.approx(0.0, abs=1e-9)


def test_beam_along_the_plane_is_not_absorbed():
    power = absorbed_power(optics_of(collector()), light(beam=800.0, incidence_deg=90.0))
    assert power.plate[0] == pytest.approx(0.0, abs=1e-4)


def test_integrated_sky_and_effective_angle_agree_to_one_percent():
    """Brandemuehl & Beckman 1980 give their polynomial as within 0.6 deg of the integration; here as shares of the light."""
    for tilt in (0.0, 20.0, 40.0, 60.0, 90.0):
        whole = optics_of(collector(tilt_deg=tilt))
        angle = optics_of(collector(tilt_deg=tilt, integrated_diffuse=False))
        assert whole.sky[0] == pytest.approx(angle.sky[0], rel=0.01)
        if tilt > 0.0:
            assert whole.ground[0] == pytest.approx(angle.ground[0], rel=0.03)
