"""What the checks of a weather file look at: the columns as they were read, the sun, and the clock."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import pandas as pd

from weather.findings import Finding, Severity
from weather.sun import Sun
from weather.year import Floats, Mask, Site

__all__ = ["Evidence", "clear_sky"]


def clear_sky(sun: Sun, *, site: Site) -> Floats:
    """GHI of a clean, dry sky without cloud: an envelope that hardly an hour exceeds.

    Parameters
    ----------
    sun
        n hours.
    site
        Whose altitude counts.

    Returns
    -------
    ndarray
        ``(n,)`` [W/m2].

    Notes
    -----
    **Source**: Ineichen, Solar Energy 82 (2008) 758, through pvlib, with an optical depth of 0.02 and 0.5 cm of water.
    """
    from pvlib.atmosphere import alt2pres
    from pvlib.clearsky import simplified_solis

    found = simplified_solis(
        90.0 - sun.apparent_zenith_deg,
        aod700=0.02,
        precipitable_water=0.5,
        pressure=float(alt2pres(site.altitude_m)),
        dni_extra=sun.dni_extra,
    )
    return np.asarray(np.nan_to_num(np.asarray(found["ghi"], dtype=float)))


@dataclass(frozen=True, kw_only=True)
class Evidence:
    """Columns on the hourly axis before anything was mended.

    Parameters
    ----------
    columns
        SI, NaN for missing; what the file lacks throughout is left out.
    made
        Columns of radiation that were made from the others.
    sun
        At the middle of each hour, by the shift in use.
    site
        Place.
    stamps
        The file's own, for messages.
    """

    columns: Mapping[str, Floats]
    made: frozenset[str]
    sun: Sun
    site: Site
    stamps: pd.DatetimeIndex

    @cached_property
    def cosine(self) -> Floats:
        """Of the zenith angle, 0 below the horizon."""
        return np.asarray(np.maximum(np.cos(np.radians(self.sun.apparent_zenith_deg)), 0.0))

    @cached_property
    def clear(self) -> Floats:
        """GHI of a clean, clear sky [W/m2]."""
        return clear_sky(self.sun, site=self.site)

    def read(self, name: str) -> Floats | None:
        """Return a column as the file has it; None if it has none or if it was made from others."""
        return None if name in self.made else self.columns.get(name)

    def finding(self, name: str, mask: Mask, *, severity: Severity, what: str, do: str = "") -> list[Finding]:
        """Return a finding on the hours of a mask; nothing where there are none."""
        hours = int(np.count_nonzero(mask))
        if not hours:
            return []
        first = str(self.stamps[int(np.argmax(mask))])[:16]
        return [Finding(name=name, severity=severity, what=what, hours=hours, first=first, do=do)]
