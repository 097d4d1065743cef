"""A year's heat as a smooth function of the plate's absorptance and emittance, from a few years solved."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.polynomial import chebyshev

from weather.year import Floats

__all__ = ["Plane", "Response", "fit_response"]

NARROW = {"absorptance": 0.15, "emittance": 0.15}  # ranges up to which a quadratic will do
CHECK = (0.37, -0.45)  # of the half widths from the middle: where one more year checks the fit
STEP = 1e-4  # of absorptance and emittance, for slopes


class Plane(NamedTuple):
    """Ranges of absorptance and emittance that are of interest, and the emittance of the face above the plate."""

    absorptance: tuple[float, float]
    emittance: tuple[float, float]
    eps_above: float

    def place(self, absorptance: Floats, emittance: Floats) -> tuple[Floats, Floats]:
        """Both from -1 to 1 over the ranges; emittance by the exchange factor, to which radiation is proportional."""
        low, high = self.absorptance
        x = 2.0 * (absorptance - low) / (high - low) - 1.0
        least, most = (self._factor(np.asarray(eps)) for eps in self.emittance)
        return x, 2.0 * (self._factor(emittance) - least) / (most - least) - 1.0

    def values(self, x: float, y: float) -> tuple[float, float]:
        """Absorptance and emittance at a place."""
        low, high = self.absorptance
        least, most = (float(self._factor(np.asarray(eps))) for eps in self.emittance)
        factor = least + 0.5 * (y + 1.0) * (most - least)
        return low + 0.5 * (x + 1.0) * (high - low), 1.0 / (1.0 / factor + 1.0 - 1.0 / self.eps_above)

    def _factor(self, emittance: Floats) -> Floats:
        return np.asarray(1.0 / (1.0 / emittance + 1.0 / self.eps_above - 1.0))


class Response(NamedTuple):
    """Heat over the plane: coefficients of Chebyshev polynomials, years solved for them, and the largest error found."""

    plane: Plane
    coefficients: Floats
    years: int
    error: float

    def __call__(self, absorptance: Floats, emittance: Floats) -> Floats:
        """Return the heat [kWh/m2]; outside the plane it is carried on."""
        x, y = self.plane.place(absorptance, emittance)
        return np.asarray(chebyshev.chebval2d(x, y, self.coefficients))

    def slopes(self, absorptance: float, emittance: float) -> tuple[float, float]:
        """Return the rise of heat with absorptance and with emittance, per 1."""
        a, e = np.array([STEP, -STEP, 0.0, 0.0]), np.array([0.0, 0.0, STEP, -STEP])
        heat = self(absorptance + a, emittance + e) / (2.0 * STEP)
        return float(heat[0] - heat[1]), float(heat[2] - heat[3])


def fit_response(
    heat: Callable[[float, float], float], *, plane: Plane, known: list[tuple[float, float, float]]
) -> Response:
    """Solve years at the nodes of a grid and lay a polynomial through them.

    Parameters
    ----------
    heat
        The year's heat at an absorptance and an emittance [kWh/m2].
    plane
        Where it is wanted.
    known
        Absorptance, emittance and heat of years solved already, all with one emittance at every temperature: they check
        the fit, as does one more year beside the nodes.

    Returns
    -------
    Response
        Quadratic in absorptance, quadratic or over a wide range quartic in emittance.

    Notes
    -----
    **Source**: response surfaces, Box & Wilson, J. R. Stat. Soc. B 13 (1951) 1; at Chebyshev's nodes.
    """
    wide = [high - low for low, high in (plane.absorptance, plane.emittance)]
    counts = (3 if wide[0] <= NARROW["absorptance"] else 4, 3 if wide[1] <= NARROW["emittance"] else 5)
    nodes = [chebyshev.chebpts1(count) for count in counts]
    solved = np.array([[heat(*plane.values(float(x), float(y))) for y in nodes[1]] for x in nodes[0]])
    grid = np.meshgrid(*nodes, indexing="ij")
    matrix = chebyshev.chebvander2d(grid[0].ravel(), grid[1].ravel(), [count - 1 for count in counts])
    coefficients = np.linalg.solve(matrix, solved.ravel()).reshape(counts)
    draft = Response(plane, coefficients, solved.size + 1, 0.0)
    beside = plane.values(*CHECK)
    checks = [*known, (*beside, heat(*beside))]
    errors = [abs(float(draft(np.array(a), np.array(e))) - exact) for a, e, exact in checks]
    return draft._replace(error=max(errors))
