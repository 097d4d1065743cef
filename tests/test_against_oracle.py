"""The vectorised solver against a slow scalar solution that shares no code with it, and against a march along the tube."""

from __future__ import annotations

import math

import numpy as np
import pytest

from collector.balance.losses import Surroundings, network_of
from collector.balance.optics import absorbed_power, optics_of
from collector.balance.steady import Feed, Uptake, operate, solve_stagnation, stream_of
from collector.build.collector import Absorber, Collector, Cover
from collector.physics.fluids import liquid
from tests import oracle
from weather.plane import PlaneIrradiance

CASES = 300


def product_collector(build: dict, condition: dict) -> Collector:
    edge = build["edge"]
    share = 2.0 * (build["length"] + build["width"]) * edge["height"] / (build["length"] * build["width"])
    return Collector(
        covers=tuple(
            Cover(refractive_index=c["n"], absorption=c["kl"], emittance=c["emittance"], gap=c["gap"])
            for c in build["covers"]
        ),
        absorber=Absorber(
            absorptance=build["absorptance"],
            emittance=build["emittance_plate"],
            conductivity=build["k_plate"],
            thickness=build["delta"],
            pitch=build["pitch"],
            outer=build["d_outer"],
            inner=build["d_inner"],
            bond_resistance=1.0 / build["bond"] if build["bond"] else 0.0,
        ),
        u_back=build["back"]["conductivity"] / build["back"]["thickness"],
        u_edge=edge["conductivity"] / edge["thickness"] * share,
        length=build["length"],
        width=build["width"],
        tilt_deg=build["tilt_deg"],
        fluid=build["fluid"][0],
        mass_fraction=build["fluid"][1],
        flow=build["flow"],
        falling_absorptance=build["angle_model"] == "flat-black",
        integrated_diffuse=True,
        whole_sky=condition["longwave_view"] == "sky",
    )


def product_hour(build: dict, condition: dict) -> dict:
    collector = product_collector(build, condition)
    one = {name: np.array([condition[name]]) for name in ("beam", "sky", "horizon", "ground", "incidence_deg")}
    around = Surroundings(**{name: np.array([condition[name]]) for name in ("t_air", "t_sky", "t_ground", "h_wind")})
    absorbed = absorbed_power(optics_of(collector), PlaneIrradiance(**one, notices=()))
    network = network_of(collector, pressure=condition["pressure"])
    state = solve_stagnation(network, around, absorbed)
    on = np.array([False])
    if "stagnation" not in condition:
        at_inlet = "t_inlet" in condition
        feed = Feed(condition["t_inlet" if at_inlet else "t_mean"], at_inlet)
        uptake = Uptake(collector=collector, stream=stream_of(collector), feed=feed)
        running, on = operate(network, around, absorbed, uptake=uptake)
        state = state.replaced(on, running)
    return {
        "t_plate": float(state.t_plate[0]),
        "q_useful": float(state.useful[0]),
        "t_covers": [float(row[0]) for row in state.nodes[:-1]],
        "absorbed": float(absorbed.plate[0]),
        "u_loss": float(state.slope[0]),
        "running": bool(on[0]),
        "residual": float(state.residual[0]),
        "t_outlet": float(state.t_outlet[0]),
    }


def scalar_fluid(name: str, fraction: float):
    def at(t: float) -> tuple[float, float, float]:
        fluid = liquid(name, mass_fraction=fraction, t=np.array([t]))
        return float(fluid.heat_capacity[0]), float(fluid.viscosity[0]), float(fluid.conductivity[0])

    return at


def drawn(seed: int) -> tuple[dict, dict, dict]:
    build, condition = oracle.random_case(np.random.default_rng(seed))
    return build, condition, build | {"fluid": scalar_fluid(*build["fluid"])}


@pytest.mark.parametrize("seed", range(CASES))
def test_every_random_case_agrees_with_the_scalar_solution(seed):
    build, condition, for_oracle = drawn(seed)
    ours, theirs = product_hour(build, condition), oracle.solve(for_oracle, condition)
    assert ours["residual"] < 1e-6
    assert ours["absorbed"] == pytest.approx(theirs["absorbed"], abs=0.02)  # quadrature of the diffuse integrals
    assert ours["running"] == theirs["running"] or abs(theirs["q_useful"]) < 0.1
    assert ours["t_plate"] == pytest.approx(theirs["t_plate"], abs=0.01)
    assert ours["q_useful"] == pytest.approx(theirs["q_useful"], abs=0.1)
    assert ours["t_covers"] == pytest.approx(theirs["t_covers"], abs=0.02)
    if not theirs["kink"]:
        assert ours["u_loss"] == pytest.approx(theirs["u_loss"], rel=2e-3)


def test_the_cases_reach_every_corner():
    drawn_cases = [drawn(seed)[:2] for seed in range(CASES)]
    assert {len(build["covers"]) for build, _ in drawn_cases} == {0, 1, 2, 3}
    tilts = [build["tilt_deg"] for build, _ in drawn_cases]
    assert min(tilts) == 0.0
    assert max(tilts) == 90.0
    assert max(c["t_air"] - c["t_sky"] for _, c in drawn_cases) > 38.0
    assert min(c["h_wind"] for _, c in drawn_cases) == 2.8
    assert max(c["h_wind"] for _, c in drawn_cases) > 45.0
    assert any(c.get("t_inlet", math.inf) < c["t_air"] for _, c in drawn_cases)


@pytest.mark.parametrize(("flow", "allowed"), [(0.0025, 0.005), (0.02, 0.0015)])
@pytest.mark.parametrize("covers", [1, 2])
@pytest.mark.parametrize("inlet", [283.15, 313.15, 343.15])
def test_one_mean_plate_temperature_against_a_march_along_the_tube(flow, allowed, covers, inlet):
    pane = {"n": 1.526, "kl": 0.0128, "emittance": 0.88, "gap": 0.025}
    build = {
        "length": 2.0, "width": 1.1, "absorptance": 0.95, "emittance_plate": 0.1, "k_plate": 385.0, "delta": 0.0002,
        "pitch": 0.1, "d_outer": 0.01, "d_inner": 0.009, "bond": None, "angle_model": "constant", "tilt_deg": 40.0,
        "covers": [pane] * covers, "back": {"thickness": 0.05, "conductivity": 0.04},
        "edge": {"thickness": 0.02, "conductivity": 0.04, "height": 0.08}, "flow": flow, "fluid": ("water", 0.0),
    }  # fmt: skip
    condition = {
        "beam": 700.0, "sky": 100.0, "horizon": 10.0, "ground": 15.0, "incidence_deg": 20.0, "t_air": 293.15,
        "t_sky": 278.15, "t_ground": 293.15, "h_wind": 11.8, "pressure": 101325.0, "longwave_view": "tilted",
        "t_inlet": inlet,
    }  # fmt: skip
    ours = product_hour(build, condition)
    useful, outlet = oracle.march(build | {"fluid": scalar_fluid("water", 0.0)}, condition)
    assert ours["q_useful"] == pytest.approx(useful, rel=allowed)
    assert ours["t_outlet"] == pytest.approx(outlet, abs=0.005 * (outlet - inlet) + 0.02)
