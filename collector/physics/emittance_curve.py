"""Emittance over temperature as a solver wants it: cheap, with its slope, and as exact as the spectrum it comes from."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from collector.physics.spectrum import Spectrum, emittance
from weather.year import Floats, Mask

__all__ = ["EmittanceCurve", "emittance_function"]


@dataclass(frozen=True, kw_only=True)
class EmittanceCurve:
    """Emittance over temperature for a solver: a table of cubics; below and above it the end value is held, with no slope.

    Parameters
    ----------
    t_least, t_most
        Range of the table [K].
    cubics
        Coefficients of each interval, lowest power first, in shares of the interval, ``(4, intervals)``.
    error
        Largest departure from the exact emittance found between the table's points.
    """

    t_least: float
    t_most: float
    cubics: Floats
    error: float

    def __call__(self, t: Floats) -> tuple[Floats, Floats]:
        """Emittance and its slope [1/K] at these temperatures [K], each in their shape."""
        per_kelvin = self.cubics.shape[1] / (self.t_most - self.t_least)
        held = np.minimum(np.maximum(t, self.t_least), self.t_most)
        along = (held - self.t_least) * per_kelvin
        place = np.minimum(along.astype(np.intp), self.cubics.shape[1] - 1)
        s = along - place
        c0, c1, c2, c3 = (row.take(place) for row in self.cubics)
        slope = (c1 + s * (2.0 * c2 + 3.0 * s * c3)) * (per_kelvin * (held == t))
        return c0 + s * (c1 + s * (c2 + s * c3)), slope

    @property
    def span(self) -> tuple[float, float]:
        """Lowest and highest value at the table's points."""
        ends = (*self.cubics[0].tolist(), float(self.cubics[:, -1].sum()))
        return min(ends), max(ends)

    def shifted(self, by: float) -> EmittanceCurve:
        """Return the curve with as much added at every temperature."""
        cubics = self.cubics.copy()
        cubics[0] += by
        return EmittanceCurve(t_least=self.t_least, t_most=self.t_most, cubics=cubics, error=self.error)

    def outside(self, t: Floats) -> Mask:
        """Where the end value is held, in the shape of ``t``."""
        return (t < self.t_least) | (t > self.t_most)


def emittance_function(
    spectrum: Spectrum,
    *,
    t_least: float = 230.0,
    t_most: float = 700.0,
    step: float = 5.0,
    corrected: Callable[[Floats], Floats] | None = None,
) -> EmittanceCurve:
    """A cheap stand-in for `emittance`, with its slope.

    Parameters
    ----------
    spectrum
        Of the surface.
    t_least, t_most
        Range [K].
    step
        Of the table, about [K].
    corrected
        Of the emittance, such as from normal to hemispherical; none if left out.

    Returns
    -------
    EmittanceCurve
        Cubic Hermite, value and slope continuous; with 5 K within 1e-6 of the exact emittance, whatever the spectrum.
    """
    nodes = np.linspace(t_least, t_most, max(round((t_most - t_least) / step), 1) + 1)
    gap, nudge = nodes[1] - nodes[0], 0.05

    def exact(t: Floats) -> Floats:
        found = emittance(spectrum, t=t).value
        return found if corrected is None else corrected(found)

    value, above, below = (exact(nodes + shift) for shift in (0.0, nudge, -nudge))
    rise, slope = np.diff(value), (above - below) * (0.5 * gap / nudge)
    left, right = slope[:-1], slope[1:]
    cubics = np.stack((value[:-1], left, 3.0 * rise - 2.0 * left - right, left + right - 2.0 * rise))
    draft = EmittanceCurve(t_least=t_least, t_most=t_most, cubics=cubics, error=0.0)
    between = nodes[:-1] + 0.5 * gap
    error = float(np.abs(draft(between)[0] - exact(between)).max())
    return EmittanceCurve(t_least=t_least, t_most=t_most, cubics=cubics, error=error)
