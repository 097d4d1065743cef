"""Published relations that stand without a choice, for the list that `noonplate models` prints."""

from __future__ import annotations

from collector.build.scenario import CHOICES
from collector.physics.fluids import FLUIDS

__all__ = ["FIXED", "relations"]

FIXED = {
    "sun": "solar position algorithm, Reda & Andreas 2004, NREL/TP-560-34302, at the middle of each hour; through pvlib",
    "time stamps": "closure of GHI against DHI + DNI cos z over shifts of -300 to 300 min",
    "steps to hours": "an hour is the mean of its steps, its middle the mean of their middles: energy is kept (no source needed)",
    "limits of sunlight": "possible and rare values, components against each other; Long & Shi 2008, Open Atmos. Sci. J. 2, 23",
    "clear sky, checks": "simplified Solis; Ineichen 2008, Solar Energy 82, 758; optical depth 0.02 and 0.5 cm of water",
    "third component": "closure: GHI = DHI + DNI cos z, where a file has two of the three",
    "dew point": "from relative humidity: Magnus form, WMO No. 8 (17.62, 243.12 C)",
    "covers": "Fresnel and absorption, both polarisations kept apart to the end; Duffie & Beckman, Sec. 5.1-5.3",
    "long wave": "grey parallel surfaces, Stefan-Boltzmann; sky and ground by view factor",
    "air gap to 55 deg": "Hollands, Unny, Raithby & Konicek 1976, J. Heat Transfer 98, 189",
    "air gap from 65 deg": "ElSherbiny, Raithby & Hollands 1982, J. Heat Transfer 104, 96; from 55 to 65 deg a smooth blend",
    "air gap from above": "still gas to 60 deg; from there in a straight line to the vertical layer (our joining rule, no source)",
    "air": "Lemmon & Jacobsen 2004, Int. J. Thermophysics 25, 21, as cubic fits within 0.05 %",
    "plate": "fin, bond and tube: F'; exponential along the flow: F_R; Duffie & Beckman, Sec. 6.5-6.7, at the loss's true slope",
    "tube, laminar": "mean over the length with both profiles developing; Gnielinski, VDI Heat Atlas, ch. G1 (from memory)",
    "tube, turbulent": "Gnielinski 1976, Int. Chem. Eng. 16, 359; from Re 2300 to 10000 linear between the two",
    "sun on a coating": "reflectance weighted with ASTM G173-03, global for absorptance; as in ASTM E903 (from memory)",
    "heat of a coating": "reflectance weighted with Planck's curve, straight lines integrated exactly; Siegel & Howell, Ch. 3",
    "emittance, plate's": "at the plate's temperature in every hour, also for what it takes up (grey); within 1e-6",
    "normal to whole": "a metal's: Hagen & Rubens 1903, Ann. Phys. 11, 873, in Fresnel's equations over the hemisphere",
    "films": "Abeles 1950, Ann. Physique 5, 596, as recursion of Rouard 1937, Ann. Physique 7, 291 (both from memory)",
    "mixtures in films": "Maxwell Garnett 1904, Phil. Trans. A 203, 385; Bruggeman 1935, Ann. Phys. 416, 636",
    "coatings, intervals": "normal draws on a polynomial through solved years; Box & Wilson 1951, J. R. Stat. Soc. B 13, 1",
    "coatings, ageing": "PC = -d_alpha + w d_eps, ISO 22975-3:2014 (weight from memory); Arrhenius 1889, Z. Phys. Chem. 4, 226",
    "synthetic days": "Bendt, Collares-Pereira & Rabl 1981, Solar Energy 27, 1; Hollands & Huget 1983, Solar Energy 30, 195; "
    "one day from each equal part: Knight, Klein & Duffie 1991, Solar Energy 46, 109",
    "synthetic order": "sunshine, maximum and minimum temperature: Richardson 1981, Water Resour. Res. 17, 182 (from memory)",
    "synthetic hours": "trend and scatter: Graham & Hollands 1990, Solar Energy 44, 333 (from memory)",
    "synthetic diffuse": "Erbs, Klein & Duffie 1982, Solar Energy 28, 293, through pvlib; beam by closure",
    "synthetic limit": "clear sky: Ineichen 2008, Solar Energy 82, 758, through pvlib",
    "synthetic air": "half cosines: de Wit, Goudriaan & van Laar 1978; range and scatter where not given: Erbs, Klein & Beckman "
    "1983, ASHRAE J. 25(6), 60 (from memory); dew point where not given: Running et al. 1987, Can. J. For. Res. 17, 472",
    "synthetic wind": "Weibull of shape 2, autoregressive; common practice, no source",
    "synthetic cloud": "Kasten & Czeplak 1980, Solar Energy 24, 177, solved for the cover",
    "horizon": "view of the sky above the skyline, over elevation in closed form; beam by five-minute parts (our rule, no source)",
    "rows, beam": "shaded share of the height by the profile angle; Duffie & Beckman, Sec. 1.9; loss in proportion to it",
    "rows, sky": "mean masking angle over the height; Passias & Kallback 1984, Solar Cells 11, 281 (from memory)",
    "rows, ground": "strip between rows by crossed strings; Hottel 1954, in McAdams, Heat Transmission, Ch. 4 (from memory)",
    "years": "sample statistics, normal P90; exceedance by rank m/(n+1), Weibull 1939, in Gumbel 1958, Statistics of Extremes",
    "coatings, worth": "present value, (1 - (1 + d)^-n) / d; levelised cost of heat, Louvet et al. 2019, Solar Energy 193, 85",
}


def relations() -> dict[str, dict[str, str]]:
    """Every relation in use, with its source.

    Returns
    -------
    dict
        Choices by step of ``[models]``; the fluids; and, under ``fixed``, those without a choice.
    """
    return {**CHOICES, "fluid": FLUIDS, "fixed": FIXED}
