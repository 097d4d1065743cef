"""Heat that a collector holds per kelvin of its plate."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from collector.balance.losses import Network, Surroundings, newton_step
from collector.build.collector import Collector
from collector.physics.fluids import liquid

__all__ = ["HeldHeat", "held_heat"]

REFERENCE = {
    "plate": 333.15,
    "air": 293.15,
    "sky": 278.15,
    "h_wind": 12.0,
}  # K, W/m2K: where the covers' share is taken
HALF = 0.5  # of an insulation with a straight profile from the plate to the air


class HeldHeat(NamedTuple):
    """Heat held per area and kelvin of the plate, by part [J/m2K]."""

    plate: float
    fluid: float
    covers: float
    insulation: float

    @property
    def total(self) -> float:
        """All parts [J/m2K]."""
        return sum(self)


def held_heat(collector: Collector, network: Network) -> HeldHeat | None:
    """Heat capacity of a collector from its materials.

    Plate and tubes and what is in them count whole. A cover counts by as much as it follows the plate, which the loss network
    tells; insulation by half.

    Parameters
    ----------
    collector
        As built, with what is known of its materials.
    network
        Its losses.

    Returns
    -------
    HeldHeat or None
        None where a material's heat capacity is not known.

    Notes
    -----
    **Source**: Duffie & Beckman, Sec. 6.12: (mc)_e = (mc)_plate + sum of a_i (mc)_cover i, a_i the ratio of loss coefficients,
    which is the cover's move over the plate's; the half of the insulation is that of a straight profile.
    """
    materials = collector.materials
    if materials.plate is None or materials.back is None or materials.edge is None or None in materials.covers:
        return None
    absorber = collector.absorber
    tube_wall = math.pi / 4.0 * (absorber.outer**2 - absorber.inner**2) / absorber.pitch
    fluid = liquid(collector.fluid, mass_fraction=collector.mass_fraction, t=np.array([REFERENCE["plate"] - 10.0]))
    content = math.pi / 4.0 * absorber.inner**2 / absorber.pitch
    covers = sum(share * (held or 0.0) for share, held in zip(_following(network), materials.covers, strict=True))
    return HeldHeat(
        plate=(absorber.thickness + tube_wall) * materials.plate,
        fluid=content * float(fluid.density[0] * fluid.heat_capacity[0]),
        covers=covers,
        insulation=HALF * (materials.back + materials.edge),
    )


def _following(network: Network) -> list[float]:
    """Moves of the covers per move of the plate, outermost first, at the reference."""
    one = {name: np.array([REFERENCE[name]]) for name in ("air", "sky", "h_wind")}
    around = Surroundings(t_air=one["air"], t_sky=one["sky"], t_ground=one["air"], h_wind=one["h_wind"])
    facing = network.facing(around)
    sun = np.zeros((len(network.gaps), 1))
    nodes = np.full((len(network.gaps) + 1, 1), REFERENCE["air"])
    nodes[-1] = REFERENCE["plate"]
    for _ in range(20):
        step = newton_step(network, facing, sun_on_covers=sun, nodes=nodes)
        nodes = nodes + step.move(plate=np.zeros(1))
    at_rest, moved = (step.move(plate=np.array([kelvin])) for kelvin in (0.0, 1.0))
    return [float(move) for move in (moved - at_rest)[:-1, 0]]
