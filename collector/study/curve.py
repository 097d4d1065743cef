"""The efficiency curve: a collector in the language of laboratories and data sheets."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from scipy.constants import Stefan_Boltzmann, atm, zero_Celsius

from collector.balance.losses import Surroundings
from collector.balance.model import Model, model_of
from collector.balance.optics import optics_of
from collector.balance.reported import diffuse_modifier
from collector.balance.steady import Feed, solve_running, solve_stagnation
from collector.build.collector import Collector, collector_of
from collector.build.scenario import Scenario
from collector.physics.fluids import freezing_point, valid_range
from collector.study.cautions import at_stagnation
from collector.study.year import wind_coefficient
from weather.errors import InputError, Problem
from weather.plane import PlaneIrradiance
from weather.year import Floats

__all__ = ["Bench", "curve_of", "fit_coefficients"]

LEVELS = 9  # of mean fluid temperature; the standard asks for four
LONGWAVE = -100.0  # W/m2, sky's long wave less that of the air: for power curves in ISO 9806:2013
ANGLES = np.arange(0.0, 90.0, 10.0)  # deg
STAGNATION = {"irradiance": 1000.0, "air_C": 30.0}  # standard stagnation, ISO 9806 (from memory)
STILL = 1.0  # m/s, of stagnation: the standard asks for less (from memory)
LABORATORY = {"irradiance": 950.0, "air_C": 22.0}  # where a laboratory might measure it and extrapolate from
BLUE_SKY = (0.85, 0.15)  # beam and diffuse of hemispherical light, ISO 9806:2017 Annex B
TERMS = ("eta0", "a1_W_m2K", "a2_W_m2K2", "a3_J_m3K", "a4", "a6_s_m")
BOUNDS = {
    "irradiance": (300.0, 1500.0, "W/m2"),
    "air": (-40.0, 60.0, "C"),
    "wind": (0.0, 20.0, "m/s"),
    "sky_temp": (-120.0, 80.0, "C"),
    "to": (10.0, 200.0, "K above the air"),
    "at": (0.0, 200.0, "K above the air"),
}


@dataclass(frozen=True, kw_only=True)
class Bench:
    """Conditions of a test at normal incidence.

    Parameters
    ----------
    irradiance
        Beam on the plane [W/m2].
    air, wind
        [C, m/s]
    sky_temp
        [C]; None is the standard's long wave, 100 W/m2 below that of the air.
    to
        Highest mean fluid above the air [K]; None is 80, or as far as the fluid's data go.
    at
        Working point to be read off, mean fluid above the air [K].
    """

    irradiance: float = 1000.0
    air: float = 20.0
    wind: float = 3.0
    sky_temp: float | None = None
    to: float | None = None
    at: float = 40.0

    def __post_init__(self) -> None:
        wrong = [
            Problem(
                where=f"--{name.replace('_', '-')}",
                what="out of range",
                got=f"{value:g}",
                allowed=f"{low:g} to {high:g} {unit}",
            )
            for name, (low, high, unit) in BOUNDS.items()
            if (value := getattr(self, name)) is not None and not low <= value <= high
        ]
        if wrong:
            raise InputError(wrong)

    def t_sky(self, share: float) -> float:
        """Return the sky temperature [K]; the standard's long wave is that on the plane, where the sky has its share."""
        if self.sky_temp is not None:
            return self.sky_temp + zero_Celsius
        return _sky_of(LONGWAVE, t_air=self.air + zero_Celsius, share=share)


def _sky_of(longwave: float, *, t_air: float, share: float) -> float:
    """Sky temperature [K] that makes long wave on the plane so much more than the air's; what is not sky is as warm as air."""
    return float((t_air**4 + longwave / Stefan_Boltzmann / share) ** 0.25)


def curve_of(scenario: Scenario, bench: Bench, *, terms: bool = False) -> dict[str, Any]:
    """Efficiency curve, its coefficients, incidence modifiers and standard stagnation.

    Parameters
    ----------
    scenario
        Its collector, fluid and relations; place and weather are not read.
    bench
        Conditions of the test.
    terms
        Also vary wind and sky, and fit their terms.

    Returns
    -------
    dict
        Plain numbers, units in the keys; per area of length x width, and under ``per_gross`` per gross area where known.
    """
    model = model_of(collector_of(scenario), pressure=atm)
    levels = _levels(scenario, bench)
    useful = np.array([_useful(scenario, model, bench, mean_above=level) for level in levels])
    efficiency = useful / bench.irradiance
    fitted = fit_coefficients(levels, efficiency=efficiency, irradiance=bench.irradiance)
    modifiers = _modifiers(model)
    k_diffuse = _diffuse(model)
    eta0_hem = fitted["eta0"] * (BLUE_SKY[0] + BLUE_SKY[1] * k_diffuse)
    area = scenario.collector.length_m * scenario.collector.width_m
    return {
        "title": scenario.title,
        "bench": {
            "irradiance_W_m2": bench.irradiance,
            "air_C": bench.air,
            "wind_m_s": bench.wind,
            "sky_C": bench.t_sky(model.network.sky_share) - zero_Celsius,
        },
        "points": [
            {"above_air_K": float(level), "reduced_m2K_W": float(level / bench.irradiance), "efficiency": float(value)}
            for level, value in zip(levels, efficiency, strict=True)
        ],
        **fitted,
        **({"with_terms": _terms(scenario, model, bench)} if terms else {}),
        "a5_kJ_m2K": _effective_capacity(scenario, model, bench),
        **modifiers,
        "K_diffuse": k_diffuse,
        "eta0_hemispherical": eta0_hem,
        "peak_W_per_module": 1000.0 * eta0_hem * area,
        "stagnation": _stagnation(scenario, model, bench, fitted=fitted),
        "working_point": _working_point(bench, fitted, reached=float(levels[-1])),
        **_per_gross(scenario, fitted),
        "notices": _notices(scenario, bench, levels=levels, fitted=fitted),
        "cautions": list(
            at_stagnation(_still(scenario, model, bench, **STAGNATION) - zero_Celsius, fluid=scenario.fluid.name)
        ),
    }


def fit_coefficients(above_air: Floats, *, efficiency: Floats, irradiance: float) -> dict[str, Any]:
    """Least squares of eta = eta0 - a1 (tm - ta)/G - a2 (tm - ta)^2/G.

    Parameters
    ----------
    above_air
        Mean fluid above air, ``(n,)`` [K].
    efficiency
        ``(n,)``.
    irradiance
        [W/m2]

    Returns
    -------
    dict
        Coefficients, and the largest and the rms difference in percentage points. A negative a2 is refused by the standard:
        then the line is straight.

    Notes
    -----
    **Source**: ISO 9806:2017, steady-state form.
    """
    columns = np.array([np.ones_like(above_air), -above_air / irradiance, -(above_air**2) / irradiance]).T
    found = np.linalg.lstsq(columns, efficiency, rcond=None)[0]
    if found[2] < 0.0:
        found = np.array([*np.linalg.lstsq(columns[:, :2], efficiency, rcond=None)[0], 0.0])
    missed = 100.0 * (columns @ found - efficiency)
    return {
        "eta0": float(found[0]),
        "a1_W_m2K": float(found[1]),
        "a2_W_m2K2": float(found[2]),
        "fit_largest_points": float(np.abs(missed).max()),
        "fit_rms_points": float(np.sqrt(np.mean(missed**2))),
    }


def _levels(scenario: Scenario, bench: Bench) -> Floats:
    low, high = valid_range(scenario.fluid.name, mass_fraction=scenario.fluid.mass_fraction)
    t_air = bench.air + zero_Celsius
    if t_air < low:
        freezing = freezing_point(scenario.fluid.name, mass_fraction=scenario.fluid.mass_fraction) - zero_Celsius
        what = f"{scenario.fluid.name} is frozen at the bench's air temperature"
        raise InputError(
            Problem(where="--air", what=what, got=f"{bench.air:g} C", allowed=f"at least {freezing:.1f} C")
        )
    reach = bench.to if bench.to is not None else min(80.0, high - t_air - 2.0)
    return np.linspace(0.0, reach, LEVELS)


def _around(scenario: Scenario, *, air_C: float, t_sky: float, wind: float) -> Surroundings:  # noqa: N803 # the unit's symbol
    one = np.ones(1)
    return Surroundings(
        t_air=(air_C + zero_Celsius) * one,
        t_sky=t_sky * one,
        t_ground=(air_C + zero_Celsius) * one,
        h_wind=wind_coefficient(scenario, wind * one),
        wind=wind * one,
    )


def _beam(irradiance: float) -> PlaneIrradiance:
    none = np.zeros(1)
    return PlaneIrradiance(
        beam=np.array([irradiance]), sky=none, horizon=none, ground=none, incidence_deg=none, notices=()
    )


def _useful(scenario: Scenario, model: Model, bench: Bench, *, mean_above: float) -> float:
    around = _around(scenario, air_C=bench.air, t_sky=bench.t_sky(model.network.sky_share), wind=bench.wind)
    feed = Feed(bench.air + zero_Celsius + mean_above, at_inlet=False)
    absorbed = model.absorbed(_beam(bench.irradiance), around)
    state = solve_running(model.network, around, absorbed, uptake=model.uptake(feed))
    if not state.converged[0]:
        raise ArithmeticError(f"no balance at {mean_above:g} K above the air")
    return float(state.useful[0])


def _terms(scenario: Scenario, model: Model, bench: Bench) -> dict[str, float]:
    """Wind and long-wave terms, from the same levels in other winds and under other skies; all fitted together."""
    t_air = bench.air + zero_Celsius
    rows, values = [], []
    for level in _levels(scenario, bench)[::2]:
        for wind in (1.0, 2.0, 3.0, 4.0, 5.0):
            for longwave in (-150.0, -100.0, -50.0, 0.0):
                t_sky = _sky_of(longwave, t_air=t_air, share=model.network.sky_share)
                here = replace(bench, wind=wind, sky_temp=t_sky - zero_Celsius)
                values.append(_useful(scenario, model, here, mean_above=float(level)))
                beyond, g = wind - 3.0, bench.irradiance
                rows.append([g, -level, -(level**2), -beyond * level, longwave, -beyond * g])
    found, *_ = np.linalg.lstsq(np.array(rows), np.array(values), rcond=None)
    missed = 100.0 * (np.array(rows) @ found - np.array(values)) / bench.irradiance
    return dict(zip(TERMS, map(float, found), strict=True)) | {
        "fit_largest_points": float(np.abs(missed).max()),
        "fit_rms_points": float(np.sqrt(np.mean(missed**2))),
    }


def _effective_capacity(scenario: Scenario, model: Model, bench: Bench) -> float | None:
    """Heat capacity counted at the mean fluid: the plate follows it by F', and of its heat F' reaches the fluid."""
    if model.capacity is None:
        return None
    if not isinstance(model.collector, Collector):
        return model.capacity / 1e3
    around = _around(scenario, air_C=bench.air, t_sky=bench.t_sky(model.network.sky_share), wind=bench.wind)
    feed = Feed(bench.air + zero_Celsius + bench.at, at_inlet=False)
    absorbed = model.absorbed(_beam(bench.irradiance), around)
    state = solve_running(model.network, around, absorbed, uptake=model.uptake(feed))
    return float(state.f_prime[0] ** 2) * model.capacity / 1e3


def _modifiers(model: Model) -> dict[str, Any]:
    """Beam incidence modifier each ten degrees, and the b0 form that comes nearest to 60 degrees with its largest error."""
    collector = model.collector
    if isinstance(collector, Collector):
        shares = optics_of(collector).beam(ANGLES)[0]
        values = shares / shares[0]
    else:
        values = np.interp(ANGLES, collector.beam_angles_deg, collector.beam_modifiers)
    near = ANGLES <= 60.0
    away = 1.0 / np.cos(np.radians(ANGLES[near])) - 1.0
    b0 = float((away @ (1.0 - values[near])) / (away @ away))
    return {
        "K_beam": [{"incidence_deg": float(a), "K": float(k)} for a, k in zip(ANGLES, values, strict=True)],
        "b0": b0,
        "b0_largest_error": float(np.abs(1.0 - b0 * away - values[near]).max()),
    }


def _diffuse(model: Model) -> float:
    """Of isotropic sky light at the mounted tilt, over beam at normal incidence."""
    if isinstance(model.collector, Collector):
        optics = optics_of(model.collector)
        return float(optics.sky[0] / optics.beam(np.zeros(1))[0, 0])
    return diffuse_modifier(model.collector)


def _still(scenario: Scenario, model: Model, bench: Bench, *, irradiance: float, air_C: float) -> float:  # noqa: N803
    """Plate temperature with no flow [K]."""
    t_sky = replace(bench, air=air_C).t_sky(model.network.sky_share)
    around = _around(scenario, air_C=air_C, t_sky=t_sky, wind=STILL)
    absorbed = model.absorbed(_beam(irradiance), around)
    return float(solve_stagnation(model.network, around, absorbed).t_plate[0])


def _stagnation(scenario: Scenario, model: Model, bench: Bench, *, fitted: dict[str, Any]) -> dict[str, float]:
    """Standard stagnation from the heat balance, as a laboratory would extrapolate it, and as the curve crosses zero."""
    measured = _still(scenario, model, bench, **LABORATORY) - zero_Celsius
    g, air = STAGNATION["irradiance"], STAGNATION["air_C"]
    extrapolated = air + g / LABORATORY["irradiance"] * (measured - LABORATORY["air_C"])
    eta0, a1, a2 = fitted["eta0"], fitted["a1_W_m2K"], fitted["a2_W_m2K2"]
    above = (-a1 + (a1**2 + 4.0 * a2 * eta0 * g) ** 0.5) / (2.0 * a2) if a2 > 1e-9 else eta0 * g / a1
    return {
        "balance_C": _still(scenario, model, bench, **STAGNATION) - zero_Celsius,
        "laboratory_C": extrapolated,
        "curve_C": air + above,
    }


def _working_point(bench: Bench, fitted: dict[str, Any], *, reached: float) -> dict[str, Any]:
    above, g = bench.at, bench.irradiance
    loss = (fitted["a1_W_m2K"] * above + fitted["a2_W_m2K2"] * above**2) / g
    return {
        "above_air_K": above,
        "efficiency": fitted["eta0"] - loss,
        "optical_loss": 1.0 - fitted["eta0"],
        "heat_loss": loss,
        "beyond_the_points": above > reached,
    }


def _per_gross(scenario: Scenario, fitted: dict[str, Any]) -> dict[str, Any]:
    table = scenario.collector
    if table.gross_area_m2 is None:
        return {}
    share = table.length_m * table.width_m / table.gross_area_m2
    return {"per_gross": {key: share * fitted[key] for key in ("eta0", "a1_W_m2K", "a2_W_m2K2")}}


def _notices(scenario: Scenario, bench: Bench, *, levels: Floats, fitted: dict[str, Any]) -> list[str]:
    fluid, said = scenario.fluid, []
    _, high = valid_range(fluid.name, mass_fraction=fluid.mass_fraction)
    beyond = np.count_nonzero(levels + bench.air + zero_Celsius > high)
    if beyond:
        said.append(f"{fluid.name}: {beyond} levels beyond the data's {high - zero_Celsius:.0f} C, held at its end")
    if fitted["a2_W_m2K2"] == 0.0:
        said.append("a2 came out negative and was left out, as the standard asks")
    report = scenario.collector.tested
    if report is not None and report.tested_to_K is not None and levels[-1] > report.tested_to_K:
        said.append(
            f"levels beyond {report.tested_to_K:g} K, to which the report was tested, and stagnation: extrapolated"
        )
    if bench.at > levels[-1]:
        said.append(f"the working point, {bench.at:g} K, is beyond the last level, {levels[-1]:g} K: extrapolated")
    said.append(f"stagnation in wind of {STILL:g} m/s, under the bench's sky; in calm air it is hotter")
    return said
