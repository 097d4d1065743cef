"""A coating by its spectrum: what it absorbs of sunlight, what it radiates at every temperature, and how sure both are."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from collector.build.surfaces import TOLD, Surface, corrected_by_metal, read_surface, reference_sun
from collector.physics.blackbody import planck_1901
from collector.physics.layers import hemispherical_of_normal
from collector.physics.spectrum import cut_off, emittance, solar_absorptance
from weather.errors import InputError, Problem
from weather.year import Floats

__all__ = ["SurfaceStudy", "study_surface"]

TABLE = np.arange(0.0, 401.0, 25.0)  # C
TEMPERATURES = (-50.0, 1000.0)  # C, that can be asked for
SHOWN = np.geomspace(0.28e-6, 40e-6, 600)  # m, of the curves of a black body
CAUTION = (
    "Stagnation is where a plate gets hottest: at 200 C and more with steam, scalding surfaces and pressure, and where "
    "coatings age. `noonplate coatings` computes it for a collector; what is assumed here is only a temperature to look at."
)


class SurfaceStudy(NamedTuple):
    """What is told of a surface, in plain values; and its curves over wavelength [m] for a figure."""

    account: dict[str, Any]
    curves: dict[str, tuple[Floats, Floats]]


def study_surface(
    paths: Sequence[Path], *, overrides: Sequence[str] = (), working: float, stagnation: float, metal: bool
) -> SurfaceStudy:
    """Read a surface and tell what it does with sunlight and with heat.

    Parameters
    ----------
    paths
        CSV files of one surface, or one stack in TOML.
    overrides
        Of the stack.
    working, stagnation
        Plate temperatures of interest [C].
    metal
        Whether the emittance is taken from normal to hemispherical as a metal's.

    Returns
    -------
    SurfaceStudy
        Emittance from 0 to 400 C and at the two temperatures; bounds from what lies outside the measured range.

    Raises
    ------
    InputError
        The files are wrong, or a temperature is out of range.
    """
    for option, value in (("--working", working), ("--stagnation", stagnation)):
        if not TEMPERATURES[0] <= value <= TEMPERATURES[1]:
            allowed = f"{TEMPERATURES[0]:g} to {TEMPERATURES[1]:g} C"
            raise InputError(Problem(where=option, what="out of range", got=f"{value:g}", allowed=allowed))
    surface = read_surface(paths, overrides=overrides, metal=metal)
    turns, wavelength = cut_off(surface.normal), surface.normal.wavelength
    account = {
        "name": surface.name,
        "files": [path.name for path in paths],
        "basis": surface.basis,
        "from_um": float(wavelength[0]) * 1e6,
        "to_um": float(wavelength[-1]) * 1e6,
        "points": int(wavelength.size),
        "absorptance": {part: _absorbed(surface, part) for part in ("global", "direct")},
        "cut_off_um": None if turns is None else turns * 1e6,
        "working": _radiated(surface, np.array([working]))[0],
        "stagnation": _radiated(surface, np.array([stagnation]))[0],
        "emittance": _radiated(surface, TABLE),
        "notices": [*surface.notices, *_unlike_metal(surface), *_untold(surface)],
        "cautions": [CAUTION],
    }
    return SurfaceStudy(account, _curves(surface, working=working, stagnation=stagnation))


def _absorbed(surface: Surface, part: str) -> dict[str, float]:
    wavelength, irradiance = reference_sun(part)
    return solar_absorptance(surface.normal, wavelength=wavelength, irradiance=irradiance)._asdict()


def _radiated(surface: Surface, celsius: Floats) -> list[dict[str, float | None]]:
    """Emittance at temperatures [C]: of the normal spectrum with its bounds, and the one that the heat balance takes."""
    t = celsius + zero_Celsius
    normal, used = emittance(surface.normal, t=t), emittance(surface.emitting, t=t).value
    if surface.metal:
        used = corrected_by_metal(used)
    known = surface.metal or surface.hemispherical is not None
    told = normal.short + normal.long <= TOLD
    return [
        {
            "t_C": float(here),
            "normal": float(normal.value[row]) if told[row] else None,
            "hemispherical": float(used[row]) if known and told[row] else None,
            "short": float(normal.short[row]),
            "long": float(normal.long[row]),
            "least": float(normal.least[row]),
            "most": float(normal.most[row]),
        }
        for row, here in enumerate(celsius)
    ]


def _untold(surface: Surface) -> list[str]:
    """Temperatures of the table at which most of the heat is outside the measured range."""
    found = emittance(surface.normal, t=TABLE + zero_Celsius)
    count = int(np.count_nonzero(found.short + found.long > TOLD))
    said = f"no emittance is told at {count} of the table's {TABLE.size} temperatures: most of the heat is outside the range"
    return [said] if count else []


def _unlike_metal(surface: Surface) -> list[str]:
    """How many temperatures of the table the metal's correction leaves alone."""
    if not surface.metal:
        return []
    _, unlike = hemispherical_of_normal(emittance(surface.normal, t=TABLE + zero_Celsius).value)
    count = int(np.count_nonzero(unlike))
    said = (
        f"the metal's correction leaves {count} of the table's {TABLE.size} emittances as they are: they are above 0.5"
    )
    return [said] if count else []


def _curves(surface: Surface, *, working: float, stagnation: float) -> dict[str, tuple[Floats, Floats]]:
    """Reflectance, and sun and black bodies as power per relative step of wavelength, each over its own peak."""
    sun, irradiance = reference_sun("global")
    curves = {"reflectance": (surface.normal.wavelength, surface.normal.reflectance), "sun": (sun, sun * irradiance)}
    for name, celsius in (("working", working), ("stagnation", stagnation)):
        curves[name] = (SHOWN, SHOWN * planck_1901(SHOWN, t=celsius + zero_Celsius))
    return {
        name: (wavelength, values if name == "reflectance" else values / values.max())
        for name, (wavelength, values) in curves.items()
    }
