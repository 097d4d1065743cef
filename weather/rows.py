"""Rows of collectors in front of each other: shade, masked sky, hidden ground.

Rules of this module, for what the sources leave open:

- A row's shade is taken off in proportion to the shaded height: right for a thermal collector, not for cells in series.
- Rows are without end to either side. The first row of a field is free, all others are alike; results are the field's mean.
- A row behind another sees the strip of ground between them, as bright as open ground; the back of the row in front reflects
  nothing.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from weather.year import Floats

__all__ = ["Rows"]

HEIGHTS = 200  # places along a collector's height


@dataclass(frozen=True, kw_only=True)
class Rows:
    """Rows of collectors of one tilt, one behind the other.

    Parameters
    ----------
    distance
        From front edge to front edge, horizontal; more than height times cosine of tilt [m].
    height
        Of the collectors along their slope [m].
    count
        Rows in the field.
    ground_deg
        Slope of the ground, positive where it rises from row to row towards the back; at most the tilt [deg].
    """

    distance: float
    height: float
    count: int
    ground_deg: float = 0.0

    @property
    def behind(self) -> float:
        """Share of the field's rows that have another one in front."""
        return (self.count - 1) / self.count

    def masking_deg(self, tilt_deg: float) -> float:
        """Mean masking angle over the height of a row that has another in front.

        Parameters
        ----------
        tilt_deg
            Of the collectors [deg].

        Returns
        -------
        float
            Elevation of the front row's upper edge, seen square to the rows; negative where one looks down on it [deg].

        Notes
        -----
        **Source**: Passias & Kallback, Solar Cells 11 (1984) 281 (from memory), the mean formed numerically; on sloping ground
        the same geometry with the front row's foot lower by the rise. The sky above the mean of the angles is within 0.01 of
        the open sky's view of the exact one by crossed strings where rows stand 1.5 heights apart or more, 0.03 at 1.05.
        """
        tilt = np.radians(tilt_deg)
        below = self.height * (1.0 - (np.arange(HEIGHTS) + 0.5) / HEIGHTS)  # from the place up to the upper edge
        rise = below * np.sin(tilt) - self.distance * np.tan(np.radians(self.ground_deg))
        return float(np.degrees(np.arctan2(rise, self.distance - below * np.cos(tilt))).mean())

    def shaded(self, profile_deg: Floats, *, tilt_deg: float) -> Floats:
        """Share of its height that a row has in the shade of the one in front.

        Parameters
        ----------
        profile_deg
            Elevation of the sun projected square to the rows, above 90 where it stands behind them [deg].
        tilt_deg
            Of the collectors [deg].

        Returns
        -------
        ndarray
            0 to 1, from the foot upward.

        Notes
        -----
        **Source**: geometry of the profile angle, Duffie & Beckman, Sec. 1.9, Eq. 1.9.1.
        """
        ground, profile = np.radians(self.ground_deg), np.radians(profile_deg)
        across = np.maximum(np.sin(np.radians(tilt_deg) + profile), 1e-9)
        lit = self.distance / self.height * np.sin(profile + ground) / (np.cos(ground) * across)
        return np.asarray(np.clip(1.0 - lit, 0.0, 1.0))

    def ground_share(self, tilt_deg: float) -> float:
        """Light from the ground on a row that has another in front, over that on a free one.

        Parameters
        ----------
        tilt_deg
            Of the collectors [deg].

        Returns
        -------
        float
            At most 1; the strip between the rows, and what is seen above the row in front and below the horizontal.

        Notes
        -----
        **Source**: crossed strings, Hottel 1954, in McAdams, Heat Transmission, Ch. 4 (from memory).
        """
        tilt, ground = np.radians(tilt_deg), np.radians(self.ground_deg)
        free = 0.5 * (1.0 - np.cos(tilt))
        if free < 1e-12:
            return 1.0
        strip = self.distance / np.cos(ground)
        foot = np.array([self.distance, self.distance * np.tan(ground)])
        edge = foot + self.height * np.array([np.cos(tilt), np.sin(tilt)])
        seen = (self.height + strip - np.hypot(*edge)) / (2.0 * self.height)
        over = 0.5 * (np.cos(tilt + np.radians(min(self.masking_deg(tilt_deg), 0.0))) - np.cos(tilt))
        return float(np.clip((seen + over) / free, 0.0, 1.0))
