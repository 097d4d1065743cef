"""The usual cautions beside numbers that can hurt someone; they defer to local codes and licensed practice."""

from __future__ import annotations

from collections.abc import Iterator

from scipy.constants import zero_Celsius

from collector.balance.operated import Operated
from collector.balance.steady import SteadyState
from collector.build.scenario import Scenario
from collector.physics.fluids import freezing_point
from weather.year import Floats

__all__ = ["at_stagnation", "cautions_of", "when_running"]

BOILING = 100.0  # C, of water at sea level
SCALD = 49.0  # C; a burn takes minutes here and seconds at 60 C (table on an anti-scald information page)
LEGIONELLA = (20.0, 50.0)  # C; multiplies from 20 to 45, and store and pipe are to be kept at 50 or more (HSE L8)
GLYCOL_AGES = 120.0  # C; common practice, no source
LAST = "Work on roofs, wind and snow load, pressure and electrics: follow local codes and licensed practice."


def cautions_of(scenario: Scenario, *, hours: Operated, still: SteadyState) -> list[str]:
    """Cautions that this year's temperatures call for.

    Parameters
    ----------
    scenario
        What was solved.
    hours
        As operated.
    still
        Every hour with the pump stopped.

    Returns
    -------
    list of str
        At least one.
    """
    running = hours.t_outlet[hours.on]
    return [
        *at_stagnation(_celsius(still.t_plate, hottest=True), fluid=scenario.fluid.name),
        *_when_cold(_celsius(still.t_plate, hottest=False), scenario),
        *(when_running(_celsius(running, hottest=True)) if running.size else ()),
        LAST,
    ]


def _celsius(t: Floats, *, hottest: bool) -> float:
    return float(t.max() if hottest else t.min()) - zero_Celsius


def at_stagnation(plate_C: float, *, fluid: str) -> Iterator[str]:  # noqa: N803 # the unit's symbol
    """Cautions for a plate that stands still in the sun.

    Parameters
    ----------
    plate_C
        Its temperature [C].
    fluid
        In the tubes.

    Yields
    ------
    str
        None for a plate that stays below 60 C.
    """
    if plate_C > BOILING:
        yield (
            f"With the pump stopped the plate reaches {plate_C:.0f} C, and more in clearer or calmer air: steam, scalding "
            "surfaces, pressure. Relief, expansion and every material must be made for it."
        )
    elif plate_C > 60.0:
        yield f"With the pump stopped the plate reaches {plate_C:.0f} C: hot enough to burn."
    if plate_C > GLYCOL_AGES and "glycol" in fluid:
        limits = f"ages fast above {GLYCOL_AGES:.0f} C and its data end at 100 C"
        yield f"{fluid.capitalize()} {limits}: let it leave the collector when the pump stops."


def _when_cold(plate_C: float, scenario: Scenario) -> Iterator[str]:  # noqa: N803 # the unit's symbol
    fluid = scenario.fluid
    freezing = freezing_point(fluid.name, mass_fraction=fluid.mass_fraction) - zero_Celsius
    if plate_C < freezing + 3.0:
        yield (
            f"The standing plate falls to {plate_C:.0f} C, and {fluid.name} freezes at {freezing:.0f} C: "
            "drain it or protect it, or pipes burst."
        )


def when_running(outlet_C: float) -> Iterator[str]:  # noqa: N803 # the unit's symbol
    """Cautions for the water that the heat goes into.

    Parameters
    ----------
    outlet_C
        Hottest outlet [C].

    Yields
    ------
    str
        Scald, Legionella.
    """
    if outlet_C > BOILING:
        yield f"Outlet up to {outlet_C:.0f} C while running: without pressure it boils; steam, relief and expansion as above."
    if outlet_C > SCALD:
        yield f"Outlet up to {outlet_C:.1f} C: above {SCALD:.0f} C water scalds, at 60 C in seconds; limit it at the tap."
    if outlet_C > LEGIONELLA[0]:
        yield "Water stored between 20 and 50 C breeds Legionella: heat a store through as the local code says."
