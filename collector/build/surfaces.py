"""The absorber's surface from files: its absorptance for sunlight, and its emittance over temperature for the heat balance."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from scipy.constants import zero_Celsius

from collector.build.spectra import read_spectrum
from collector.build.stacks import FilmStack, read_stack
from collector.physics.emittance_curve import EmittanceCurve, emittance_function
from collector.physics.layers import hemispherical_of_normal, hemispherical_spectrum, normal_spectrum
from collector.physics.spectrum import Spectrum, emittance, solar_absorptance
from weather.errors import InputError, Problem
from weather.year import Floats

__all__ = [
    "BEYOND",
    "REFERENCE",
    "TOLD",
    "Surface",
    "corrected_by_metal",
    "read_surface",
    "reference_sun",
    "refuse_untold",
]

REFERENCE = 100.0 + zero_Celsius  # K, at which one number stands for an emittance over temperature
BEYOND = 0.05  # share of a black body's power at 100 C outside the measured range from which on it is said
TOLD = 0.5  # the same share, from which on no emittance is told
LEAST = 0.003  # emittance; a metal cleaner than any is measured smaller by noise alone


@dataclass(frozen=True, kw_only=True, eq=False)
class Surface:
    """A surface by its spectra, read and ready.

    Parameters
    ----------
    name
        The files' names, or the stack's title.
    normal
        Reflectance at or near normal incidence: measured, or of the stack.
    hemispherical
        Of a stack, averaged over the hemisphere; None of a measured spectrum.
    metal
        Whether a measured spectrum's emittance is taken from normal to hemispherical as a metal's.
    absorptance
        For sunlight, ASTM G173 global, normal.
    radiating
        Emittance over the plate's temperature.
    notices
        What the readers found and did.
    outside
        Share of a black body's power at 100 C outside the spectrum's range.
    """

    name: str
    normal: Spectrum
    hemispherical: Spectrum | None
    metal: bool
    absorptance: float
    radiating: EmittanceCurve
    notices: tuple[str, ...]
    outside: float = 0.0

    @property
    def emitting(self) -> Spectrum:
        """The spectrum that its emittance comes from."""
        return self.normal if self.hemispherical is None else self.hemispherical

    @property
    def basis(self) -> str:
        """What the two numbers are, in words."""
        if self.hemispherical is not None:
            return "normal absorptance, hemispherical emittance of the stack"
        return "near-normal absorptance, " + (
            "emittance from near-normal to hemispherical as a metal's" if self.metal else "near-normal emittance"
        )


def read_surface(paths: Sequence[Path], *, overrides: Sequence[str] = (), metal: bool = False) -> Surface:
    """Read a surface from spectra or from the description of its layers.

    Parameters
    ----------
    paths
        CSV files of one surface, to be joined, or one stack in TOML.
    overrides
        ``key.path=value`` of the stack.
    metal
        Whether a measured emittance is corrected from normal to hemispherical as a metal's.

    Returns
    -------
    Surface
        Ready for the heat balance.

    Raises
    ------
    InputError
        The files do not go together, can't be read or are wrong.
    """
    stacks = [path for path in paths if path.suffix.lower() == ".toml"]
    _refuse_mixture(paths, stacks=stacks, overrides=overrides, metal=metal)
    if stacks:
        return _of_stack(read_stack(stacks[0], overrides=overrides))
    found = read_spectrum(paths)
    name = " + ".join(path.name for path in paths)
    return _surface(name, normal=found.spectrum, hemispherical=None, metal=metal, notices=found.notices)


def _refuse_mixture(paths: Sequence[Path], *, stacks: Sequence[Path], overrides: Sequence[str], metal: bool) -> None:
    if stacks and len(paths) > 1:
        what, got = "a stack goes alone", f"{len(paths)} files"
        raise InputError(Problem(where=str(stacks[0]), what=what, got=got, allowed="CSV files, or one TOML file"))
    if overrides and not stacks:
        what, allowed = "there is nothing to override in a measured spectrum", "with one stack in TOML"
        raise InputError(Problem(where="--set", what=what, got=repr(overrides[0]), allowed=allowed))
    if stacks and metal:
        what = "a stack's emittance is integrated over the hemisphere as it is"
        do = "leave the correction out"
        raise InputError(Problem(where="--hemispherical", what=what, got="'metal' with a stack", do=do))


def _of_stack(stack: FilmStack) -> Surface:
    normal, hemispherical = (
        spectrum(stack.wavelength, films=stack.films, substrate=stack.substrate)
        for spectrum in (normal_spectrum, hemispherical_spectrum)
    )
    return _surface(stack.title, normal=normal, hemispherical=hemispherical, metal=False, notices=stack.notices)


def _surface(
    name: str, *, normal: Spectrum, hemispherical: Spectrum | None, metal: bool, notices: tuple[str, ...]
) -> Surface:
    sun = reference_sun("global")
    heat = normal if hemispherical is None else hemispherical
    absorbed = solar_absorptance(normal, wavelength=sun[0], irradiance=sun[1])
    radiated = emittance(heat, t=np.array([REFERENCE]))
    said = list(notices)
    if absorbed.short + absorbed.long > 0.001:
        said.append(
            f"{name}: {100 * (absorbed.short + absorbed.long):.1f} % of the sunlight is outside the spectrum's range, "
            f"end values held: absorptance {absorbed.least:.3f} to {absorbed.most:.3f}"
        )
    outside = float(radiated.short[0] + radiated.long[0])
    if outside > BEYOND:
        said.append(
            f"{name}: {100 * outside:.0f} % of a black body's power at 100 C is outside the spectrum's range, "
            f"end values held: emittance {radiated.least[0]:.3f} to {radiated.most[0]:.3f}"
        )
    if metal and hemispherical_of_normal(radiated.value)[1][0]:
        said.append(f"{name}: an emittance above 0.5 is no bare metal's: the metal's correction leaves it as it is")

    def corrected(eps: Floats) -> Floats:
        return np.maximum(corrected_by_metal(eps) if metal else eps, LEAST)

    if float(radiated.value[0]) < LEAST:
        said.append(f"{name}: emittance {radiated.value[0]:.4f} at 100 C held at {LEAST:g} in the heat balance")
    return Surface(
        name=name,
        normal=normal,
        hemispherical=hemispherical,
        metal=metal,
        absorptance=absorbed.value,
        radiating=emittance_function(heat, corrected=corrected),
        notices=tuple(said),
        outside=outside,
    )


def refuse_untold(surface: Surface, *, where: str) -> Surface:
    """Let through a surface whose spectrum tells its emittance.

    Parameters
    ----------
    surface
        Read.
    where
        For the message.

    Returns
    -------
    Surface
        The same.

    Raises
    ------
    InputError
        Most of the heat that a plate radiates lies outside the spectrum's range.
    """
    if surface.outside <= TOLD:
        return surface
    wavelength = surface.normal.wavelength
    what = f"{surface.name}: the spectrum tells no emittance, most of the heat at 100 C is outside its range"
    got = f"{wavelength[0] * 1e6:.3g} to {wavelength[-1] * 1e6:.3g} um, {100 * surface.outside:.0f} % outside"
    do = "measure further into the infrared, or give absorptance and emittance as a pair"
    raise InputError(Problem(where=where, what=what, got=got, allowed=f"at most {100 * TOLD:.0f} % outside", do=do))


def corrected_by_metal(eps_normal: Floats) -> Floats:
    """Hemispherical emittance from the normal one, as of a bare metal or a thin coating on one.

    Parameters
    ----------
    eps_normal
        Any shape.

    Returns
    -------
    ndarray
        In the same shape; unchanged above 0.5.
    """
    return hemispherical_of_normal(eps_normal)[0]


@cache
def reference_sun(part: str) -> tuple[Floats, Floats]:
    """Reference spectrum of sunlight.

    Parameters
    ----------
    part
        "global" on a plane tilted by 37 degrees, or "direct" with the sky around the sun.

    Returns
    -------
    tuple
        Wavelength [m] and irradiance per wavelength, each ``(n,)``.

    Notes
    -----
    **Source**: ASTM G173-03, 280 to 4000 nm, as carried by pvlib.
    """
    from pvlib.spectrum import get_reference_spectra

    sun = get_reference_spectra(standard="ASTM G173-03")[part]
    return sun.index.to_numpy(dtype=float) * 1e-9, sun.to_numpy(dtype=float)
