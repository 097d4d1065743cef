"""Light on a stack of thin films over a thick base: interference, and the index of a mixture too fine for light to tell apart."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from collector.physics.spectrum import Spectrum
from weather.year import Floats, Mask

__all__ = [
    "Complexes",
    "Film",
    "Response",
    "bruggeman_1935",
    "film_stack",
    "hemispherical_of_normal",
    "hemispherical_spectrum",
    "maxwell_garnett_1904",
    "normal_spectrum",
]

Complexes = NDArray[np.complex128]
VANISHING = (
    1e-9  # cosine, or normal component of a wave vector, below which a wave along the plane would divide by nothing
)


class Film(NamedTuple):
    """One thin film: complex index n + ik with k not negative, shape ``(n,)``, and thickness [m]."""

    refractive_index: Complexes
    thickness: float


class Response(NamedTuple):
    """Shares of the light reflected and let into the base, ``(2, angles, n)``: the polarisation across and along the plane."""

    reflectance: Floats
    transmittance: Floats


def film_stack(wavelength: Floats, *, films: Sequence[Film], substrate: Complexes, incidence_deg: Floats) -> Response:
    """Reflectance of a stack of films in air, and what it lets into its base.

    All waves within the films interfere; from the base nothing comes back. The transfer matrices are taken one film at a
    time from the base up, as the ratio of the waves going up and down. Every exponential in that form decays, so that a
    thick absorbing film does not overflow.

    Parameters
    ----------
    wavelength
        In air, shape ``(n,)`` [m].
    films
        Outermost first; none is the bare base.
    substrate
        Complex index of the base, shape ``(n,)``.
    incidence_deg
        Angles in air from the normal, shape ``(angles,)`` [deg]; at 90 all is reflected.

    Returns
    -------
    Response
        What is neither reflected nor let into the base is absorbed in the films. An opaque base absorbs the rest.

    Notes
    -----
    **Source**: Abeles, Ann. Physique 5 (1950) 596, in the recursive form of Rouard, Ann. Physique 7 (1937) 291 (both from
    memory). Held against an independent solution by ``tests/test_layers_optics.py``.
    """
    cos = np.maximum(np.cos(np.radians(np.asarray(incidence_deg, dtype=float))), VANISHING)[:, None]
    media = [np.ones(1, dtype=complex), *(film.refractive_index for film in films), substrate]
    normal = [_normal_component(n, sin_squared=1.0 - cos * cos) for n in media]
    admittance = [np.stack((q, n * n / q)) for q, n in zip(normal, media, strict=True)]
    back, through = _face(admittance[-2], admittance[-1], returned=np.zeros(1, dtype=complex))
    for place in range(len(films), 0, -1):
        once = np.exp((2j * np.pi * films[place - 1].thickness / wavelength) * normal[place])
        back, lets = _face(admittance[place - 1], admittance[place], returned=back * (once * once))
        through *= lets * once
    into = admittance[-1].real / admittance[0].real
    return Response(_power(back), _power(through) * into)


def _normal_component(n: Complexes, *, sin_squared: Floats) -> Complexes:
    """Index times the cosine within a medium: the root that decays or goes forward, ``(angles, n)``."""
    q = np.sqrt(n * n - sin_squared)
    q[np.abs(q) < VANISHING] = VANISHING
    return np.asarray(q)


def _face(above: Complexes, below: Complexes, *, returned: Complexes) -> tuple[Complexes, Complexes]:
    """Reflection and transmission of the field along a face, from both admittances and the share that comes back to it."""
    less, more = above - below, above + below
    many = 1.0 / (more + less * returned)
    return (less + more * returned) * many, 2.0 * above * many


def _power(field: Complexes) -> Floats:
    return np.asarray(field.real**2 + field.imag**2)


def normal_spectrum(
    wavelength: Floats, *, films: Sequence[Film], substrate: Complexes, incidence_deg: float = 0.0
) -> Spectrum:
    """Reflectance of a stack at or near normal incidence, as a spectrometer sees it.

    Parameters
    ----------
    wavelength
        Rising, shape ``(n,)`` [m].
    films, substrate
        As of `film_stack`.
    incidence_deg
        Angle of incidence; spectrometers commonly use 8 [deg].

    Returns
    -------
    Spectrum
        Polarisations averaged.
    """
    angle = np.array([incidence_deg])
    response = film_stack(wavelength, films=films, substrate=substrate, incidence_deg=angle)
    return Spectrum(wavelength=wavelength, reflectance=response.reflectance[:, 0].mean(axis=0))


def hemispherical_spectrum(
    wavelength: Floats, *, films: Sequence[Film], substrate: Complexes, angles: int = 24
) -> Spectrum:
    """Reflectance of a stack averaged over the hemisphere, each direction by its cosine.

    Emittance from it is hemispherical, which is what the plate of a collector radiates with.

    Parameters
    ----------
    wavelength
        Rising, shape ``(n,)`` [m].
    films, substrate
        As of `film_stack`.
    angles
        Number of directions.

    Returns
    -------
    Spectrum
        Polarisations averaged.

    Notes
    -----
    **Source**: Gauss & Legendre's rule in the cosine with weight twice the cosine, which is the rule in the sine squared
    with its points crowded to grazing: there a metal's absorptance runs as 1/cosine, and the plain rule needs hundreds of points.
    """
    nodes, weights = np.polynomial.legendre.leggauss(angles)
    cos = 0.5 * (nodes + 1.0)
    response = film_stack(wavelength, films=films, substrate=substrate, incidence_deg=np.degrees(np.arccos(cos)))
    return Spectrum(wavelength=wavelength, reflectance=(weights * cos) @ response.reflectance.mean(axis=0))


def hemispherical_of_normal(eps_normal: Floats) -> tuple[Floats, Mask]:
    """Hemispherical emittance of a metal, or of a thin coating that leaves its metal bare to long waves, from the normal one.

    The long-wave limit of Hagen & Rubens, n = k, ties the whole dependence on angle to the normal emittance. As that
    goes to 0 the ratio goes to 4/3.

    Parameters
    ----------
    eps_normal
        Normal emittance, 0 to 1, any shape.

    Returns
    -------
    tuple
        Hemispherical emittance, and where the normal one, above 0.50, is no bare metal's and is handed back unchanged. At
        0.50 the ratio has come down to 1.

    Notes
    -----
    **Source**: Hagen & Rubens, Ann. Phys. 11 (1903) 873, put into Fresnel's equations; our own integration over the hemisphere.
    """
    normal, ratio = _metal_ratio()
    given = np.asarray(eps_normal, dtype=float)
    return given * np.interp(given, normal, np.maximum(ratio, 1.0)), given > normal[ratio >= 1.0][-1]


@cache
def _metal_ratio() -> tuple[Floats, Floats]:
    """Normal emittance, rising, and the ratio of hemispherical to normal, for n = k from near infinite down to 0.8."""
    n = np.concatenate((np.geomspace(1e6, 200.0, 60, endpoint=False), np.geomspace(200.0, 0.8, 400)))
    nodes, weights = np.polynomial.legendre.leggauss(80)
    root = 0.5 * (nodes + 1.0)  # of the cosine: crowded towards grazing, where a metal absorbs most
    angles = np.degrees(np.arccos(root * root))
    absorbed = 1.0 - film_stack(
        n, films=(), substrate=np.asarray(n + 1j * n, dtype=np.complex128), incidence_deg=angles
    ).reflectance.mean(axis=0)
    normal = 4.0 * n / ((n + 1.0) ** 2 + n**2)
    return normal, (2.0 * weights * root**3) @ absorbed / normal


def maxwell_garnett_1904(*, inclusion: Complexes, host: Complexes, fraction: float) -> Complexes:
    """Complex index of small spheres scattered in a host.

    Parameters
    ----------
    inclusion, host
        Complex indices, shape ``(n,)``.
    fraction
        Volume of the spheres over the whole, 0 to 1; meant for few of them, up to about 0.3.

    Returns
    -------
    ndarray
        Complex index of the mixture, ``(n,)``.

    Notes
    -----
    **Source**: Maxwell Garnett, Phil. Trans. R. Soc. A 203 (1904) 385. Spheres far smaller than the wavelength.
    """
    eps_in, eps_host = inclusion**2, host**2
    polarised = fraction * (eps_in - eps_host) / (eps_in + 2.0 * eps_host)
    return np.asarray(np.sqrt(eps_host * (1.0 + 2.0 * polarised) / (1.0 - polarised)))


def bruggeman_1935(*, inclusion: Complexes, host: Complexes, fraction: float) -> Complexes:
    """Complex index of two materials mixed as equals, either of which may form the network.

    Parameters
    ----------
    inclusion, host
        Complex indices, shape ``(n,)``.
    fraction
        Volume of the inclusion over the whole, 0 to 1; the inclusion joins up at one third.

    Returns
    -------
    ndarray
        Complex index of the mixture, ``(n,)``: the root that absorbs, or for two clear materials the positive one.

    Notes
    -----
    **Source**: Bruggeman, Ann. Phys. 416 (1935) 636; spheres of both, far smaller than the wavelength.
    """
    eps_in, eps_host = inclusion**2, host**2
    b = (3.0 * fraction - 1.0) * eps_in + (2.0 - 3.0 * fraction) * eps_host
    root = np.sqrt(b * b + 8.0 * eps_in * eps_host)
    plus, minus = 0.25 * (b + root), 0.25 * (b - root)
    absorbs = minus.imag > plus.imag + 1e-12 * np.abs(root)
    return np.asarray(np.sqrt(np.where(absorbs, minus, plus)))
