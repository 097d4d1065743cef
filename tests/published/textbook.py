"""The collector of the textbook's worked examples, and a plate held at a temperature."""

from __future__ import annotations

import numpy as np
from scipy.constants import atm

from collector.balance.losses import Network, Step, Surroundings, network_of, newton_step
from collector.build.collector import Absorber, Collector, Cover

GLASS = 1.526  # refractive index, Duffie & Beckman, Sec. 5.1


def cover(*, absorption: float = 0.0) -> Cover:
    """Glass of emittance 0.88 over a gap of 25 mm: Duffie & Beckman, Example 6.4.1."""
    return Cover(refractive_index=GLASS, absorption=absorption, emittance=0.88, gap=0.025)


def collector(
    *covers: Cover, absorptance: float = 1.0, emittance: float = 0.95, tilt_deg: float = 45.0, integrated: bool = False
) -> Collector:
    """Plate and tubes of Duffie & Beckman, Example 6.5.1: 0.5 mm of copper, 10 mm tubes every 150 mm, a perfect bond."""
    absorber = Absorber(
        absorptance=absorptance,
        emittance=emittance,
        conductivity=385.0,
        thickness=0.0005,
        pitch=0.15,
        outer=0.01,
        inner=0.01,
        bond_resistance=0.0,
    )
    return Collector(
        covers=covers,
        absorber=absorber,
        u_back=0.0,
        u_edge=0.0,
        length=2.0,
        width=1.0,
        tilt_deg=tilt_deg,
        fluid="water",
        mass_fraction=0.0,
        flow=0.015,
        falling_absorptance=False,
        integrated_diffuse=integrated,
        whole_sky=True,
    )


def around(*, t_air: float, t_sky: float | None = None, h_wind: float) -> Surroundings:
    """Surroundings of one hour; a sky as warm as the air if not given, ground as warm as the air."""
    air, sky = np.array([t_air]), np.array([t_air if t_sky is None else t_sky])
    return Surroundings(t_air=air, t_sky=sky, t_ground=air, h_wind=np.array([h_wind]))


def linearised(network: Network, surroundings: Surroundings, *, nodes: list[float]) -> Step:
    """The losses of one dark hour at given temperatures, covers from the outside in and then the plate."""
    dark = np.zeros((len(network.gaps), 1))
    return newton_step(network, network.facing(surroundings), sun_on_covers=dark, nodes=np.array([nodes]).T)


def held(build: Collector, surroundings: Surroundings, *, t_plate: float) -> tuple[Step, list[float]]:
    """Losses of a plate held at a temperature, and the temperatures once every cover balances."""
    network = network_of(build, pressure=atm)
    nodes = np.linspace(float(surroundings.t_air[0]) + 5.0, t_plate, len(build.covers) + 1).tolist()
    for _ in range(50):
        step = linearised(network, surroundings, nodes=nodes)
        if np.all(np.abs(step.losses.cover_residual) < 1e-9):
            return step, nodes
        nodes = (np.array(nodes) + step.move(plate=np.zeros(1))[:, 0]).tolist()
    raise AssertionError("the covers did not come to rest")
