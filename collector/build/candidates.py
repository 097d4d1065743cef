"""Coatings to compare, as a user names them: from the catalogue, as a pair of numbers, by a spectrum or by layers."""

from __future__ import annotations

import difflib
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from collector.build.catalogue import entry, shelf
from collector.build.collector import values_of
from collector.build.surfaces import read_surface, refuse_untold
from collector.physics.emittance_curve import EmittanceCurve
from weather.errors import InputError, Problem

__all__ = ["LEAST_EMITTANCE", "Candidate", "read_candidate", "read_candidates"]

PAIR = re.compile(r"\s*(\d*\.?\d+)\s*/\s*(\d*\.?\d+)\s*")
FILES = (".csv", ".txt", ".dat", ".toml")
LOWEST = {"absorptance": 0.05, "emittance": 0.01}
LEAST_EMITTANCE = 0.003  # after ageing; as of a spectrum's emittance in the heat balance


@dataclass(frozen=True, kw_only=True, eq=False)
class Candidate:
    """One coating to compare.

    Parameters
    ----------
    name
        As the user gave it.
    basis
        What its two numbers are, in words.
    absorptance, emittance
        For sunlight; thermal, at 100 C where it depends on the temperature.
    radiating
        Emittance over temperature; None of one for all.
    notices
        What its readers found.
    """

    name: str
    basis: str
    absorptance: float
    emittance: float
    radiating: EmittanceCurve | None
    notices: tuple[str, ...]

    def aged(self, *, d_absorptance: float, d_emittance: float) -> Candidate:
        """Return the coating after ageing, its emittance shifted by as much at every temperature; wrong if out of range."""
        absorptance, emittance = self.absorptance + d_absorptance, self.emittance + d_emittance
        radiating = None if self.radiating is None else self.radiating.shifted(d_emittance)
        low, high = (emittance, emittance) if radiating is None else radiating.span
        if not (LOWEST["absorptance"] <= absorptance <= 1.0 and low >= LEAST_EMITTANCE and high <= 1.0):
            got = f"{self.name} at {absorptance:.3f}/{emittance:.3f}"
            allowed = f"absorptance {LOWEST['absorptance']:g} to 1, emittance {LEAST_EMITTANCE:g} to 1"
            raise InputError(Problem(where="--aged", what="out of range once aged", got=got, allowed=allowed))
        return Candidate(
            name=self.name,
            basis=self.basis,
            absorptance=absorptance,
            emittance=emittance,
            radiating=radiating,
            notices=(),
        )


def read_candidate(given: str, *, metal: bool = False) -> Candidate:
    """Coating that a user names.

    Parameters
    ----------
    given
        A name of the catalogue, ``absorptance/emittance``, the path of a spectrum (several of one surface parted by commas),
        or of a stack in TOML.
    metal
        Whether a measured spectrum's emittance is taken from normal to hemispherical as a metal's.

    Returns
    -------
    Candidate
        Ready for the heat balance.

    Raises
    ------
    InputError
        It is none of these, or wrong.
    """
    if given in shelf("coatings"):
        values, basis = entry("coatings", name=given), "catalogue; one emittance at every temperature"
        return _constant(given, values["absorptance"], values["emittance"], basis=basis)
    if found := PAIR.fullmatch(given):
        return _pair(given, float(found[1]), float(found[2]))
    if Path(given).suffix.lower() in FILES or Path(given).is_file():
        return _from_files(given, metal=metal)
    close = [name for name in shelf("coatings") if given.strip() and given.strip().lower() in name]
    close = close or difflib.get_close_matches(given, shelf("coatings"), n=1, cutoff=0.5)
    raise InputError(
        Problem(
            where="--coating",
            what="neither a coating of the catalogue, nor a pair, nor a file",
            got=repr(given),
            allowed="a name of `noonplate catalogue coatings`, a pair such as 0.95/0.05, a CSV spectrum, a stack in TOML",
            do=f"did you mean {close[0]!r}?" if close else "",
        )
    )


def read_candidates(given: Sequence[str], *, metal: bool = False) -> list[Candidate]:
    """Coatings that a user names.

    Parameters
    ----------
    given, metal
        As for `read_candidate`.

    Returns
    -------
    list of Candidate
        In the same order.

    Raises
    ------
    InputError
        The faults of all of them together.
    """
    found: list[Candidate] = []
    faults: list[Problem] = []
    for name in given:
        try:
            found.append(read_candidate(name, metal=metal))
        except InputError as fault:
            faults += fault.problems
    if faults:
        raise InputError(faults)
    return found


def _constant(name: str, absorptance: float, emittance: float, *, basis: str) -> Candidate:
    return Candidate(name=name, basis=basis, absorptance=absorptance, emittance=emittance, radiating=None, notices=())


def _pair(given: str, absorptance: float, emittance: float) -> Candidate:
    faults = [
        Problem(where="--coating", what=f"{key} out of range", got=given.strip(), allowed=f"{LOWEST[key]:g} to 1")
        for key, value in (("absorptance", absorptance), ("emittance", emittance))
        if not LOWEST[key] <= value <= 1.0
    ]
    if faults:
        raise InputError(faults)
    return _constant(given.strip(), absorptance, emittance, basis="as given; one emittance at every temperature")


def _from_files(given: str, *, metal: bool) -> Candidate:
    paths = [Path(given)] if Path(given).is_file() else [Path(part.strip()) for part in given.split(",")]
    stack = any(path.suffix.lower() == ".toml" for path in paths)
    surface = refuse_untold(read_surface(paths, metal=metal and not stack), where="--coating")
    values = values_of(surface)
    return Candidate(
        name=surface.name,
        basis=surface.basis,
        absorptance=values["absorptance"],
        emittance=values["emittance"],
        radiating=surface.radiating,
        notices=surface.notices,
    )
