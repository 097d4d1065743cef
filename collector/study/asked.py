"""What a user asks of a comparison of coatings, checked."""

from __future__ import annotations

import math
from dataclasses import dataclass

from weather.errors import InputError, Problem

__all__ = ["Asked", "changes_of"]

BOUNDS = {  # option: least, most, unit
    "limit": (-50.0, 500.0, "C"),
    "sigma_alpha": (0.0, 0.1, ""),
    "sigma_eps": (0.0, 0.2, ""),
    "draws": (500, 100_000, ""),
    "seed": (0, 2**32 - 1, ""),
    "price": (0.0, 1000.0, "money per kWh"),
    "life": (1.0, 60.0, "years"),
    "discount": (0.0, 0.3, "a year"),
    "weight": (0.0, 2.0, ""),
    "test_temperature": (0.0, 600.0, "C"),
    "activation": (1.0, 500.0, "kJ/mol"),
}
MOST_AGEING = 0.9  # either way


@dataclass(frozen=True, kw_only=True)
class Asked:
    """Numbers of a comparison.

    Parameters
    ----------
    limit
        Plate temperature above which hours are counted [C].
    sigma_alpha, sigma_eps
        Standard uncertainty of each coating's absorptance and emittance.
    draws, seed
        Of the uncertainty.
    price
        Of heat, money per kWh; None leaves the worth out.
    life, discount
        Years, and discount rate a year.
    aged
        Change of absorptance and of emittance; None leaves ageing out.
    weight
        Of emittance in the performance criterion.
    test_temperature, activation
        Of an ageing test [C], and activation energy [kJ/mol]; both or neither.
    """

    limit: float = 150.0
    sigma_alpha: float = 0.005
    sigma_eps: float = 0.01
    draws: int = 2000
    seed: int = 0
    price: float | None = None
    life: float = 20.0
    discount: float = 0.03
    aged: tuple[float, float] | None = None
    weight: float = 0.5
    test_temperature: float | None = None
    activation: float | None = None

    def __post_init__(self) -> None:
        wrong = [
            Problem(
                where=_option(name),
                what="out of range",
                got=f"{value:g}",
                allowed=f"{low:g} to {high:g} {unit}".strip(),
            )
            for name, (low, high, unit) in BOUNDS.items()
            if (value := getattr(self, name)) is not None and not low <= value <= high
        ]
        if self.aged is not None and not all(-MOST_AGEING <= change <= MOST_AGEING for change in self.aged):
            got, allowed = ",".join(f"{change:g}" for change in self.aged), f"each -{MOST_AGEING:g} to {MOST_AGEING:g}"
            wrong.append(Problem(where="--aged", what="out of range", got=got, allowed=allowed))
        if (self.test_temperature is None) != (self.activation is None):
            given, lacking = ("activation", "test_temperature")
            if self.activation is None:
                given, lacking = lacking, given
            wrong.append(
                Problem(where=_option(given), what=f"needs {_option(lacking)} beside it", do="give both or neither")
            )
        if wrong:
            raise InputError(wrong)

    @property
    def annuity(self) -> float:
        """Present value of one unit of money a year, over the life.

        Notes
        -----
        **Source**: standard present-value formula, (1 - (1 + d)^-n) / d; as in levelised cost of heat, Louvet, Fischer et al.
        2019, Solar Energy 193, 85 (page from memory).
        """
        if self.discount == 0.0:
            return self.life
        return (1.0 - math.pow(1.0 + self.discount, -self.life)) / self.discount

    @property
    def criterion(self) -> float | None:
        """Performance criterion PC = -d_alpha + weight d_eps; None where no ageing is asked.

        Notes
        -----
        **Source**: ISO 22975-3:2014; its weight of 0.5 from memory.
        """
        return None if self.aged is None else -self.aged[0] + self.weight * self.aged[1]


def changes_of(given: str | None) -> tuple[float, float] | None:
    """Changes by age as a user writes them.

    Parameters
    ----------
    given
        Two numbers parted by a comma; None if not given.

    Returns
    -------
    tuple or None
        Of absorptance and of emittance.

    Raises
    ------
    InputError
        It is not two numbers.
    """
    if given is None:
        return None
    try:
        absorptance, emittance = (float(part) for part in given.split(","))
    except ValueError:
        what, allowed = "not two numbers", "change of absorptance, comma, change of emittance: -0.02,0.03"
        raise InputError(Problem(where="--aged", what=what, got=repr(given), allowed=allowed)) from None
    return absorptance, emittance


def _option(name: str) -> str:
    return f"--{name.replace('_', '-')}"
