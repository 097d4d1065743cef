"""A slow scalar re-solution of a flat-plate collector's steady heat balance, to judge the vectorised solver.

Nothing is shared with the code under test: one case at a time, plain floats, bracketing roots (`brentq`) nested where
unknowns are nested, adaptive quadrature for the diffuse optics and central differences for the tangent loss.
SI units and kelvin. Sources: Duffie & Beckman (D&B), Solar Engineering of Thermal Processes, chapters 3 to 6, and the
papers named beside each correlation.

build: tilt_deg, length (along the tubes, m), width (m), covers (outermost first: n, kl, emittance, gap beneath in m),
    absorptance, emittance_plate, angle_model ("constant" or "flat-black"), k_plate (W/mK), delta (m), pitch, d_outer,
    d_inner (m), bond (W/mK or None for perfect), back {thickness, conductivity}, edge {thickness, conductivity,
    height}, flow (kg/s per m2 of collector), fluid (callable, kelvin -> cp, mu, k; called between the inlet and the
    stagnation temperature only).
condition: beam (W/m2 on the plane), incidence_deg, sky, horizon, ground (W/m2 on the plane), t_air, t_sky, t_ground,
    h_wind (W/m2K), pressure (Pa), longwave_view ("tilted" or "sky"), and one of t_inlet, t_mean, stagnation=True.
"""

import functools
import itertools
import math

from scipy.integrate import quad
from scipy.optimize import brentq

SIGMA = 5.670374419e-8  # W/m2K4, CODATA 2018
GRAVITY = 9.80665  # m/s2
HALF_PI = math.pi / 2
DIFFERENCE = 2e-3  # K, half step of the central differences
TIGHT = 1e-10  # K, innermost roots
FLAT_BLACK = (1.0, -1.5879e-3, 2.7314e-4, -2.3026e-5, 9.0244e-7, -1.8e-8, 1.7734e-10, -6.9937e-13)


# --- optics ----------------------------------------------------------------------------------------------------------
def pane(n, kl, angle):
    """Transmittance and reflectance (-) of one slab for the two polarisations; Fresnel in cosines, D&B 5.1 to 5.3."""
    c1 = max(math.cos(angle), 0.0) if angle < HALF_PI else 0.0
    c2 = math.sqrt(1.0 - (1.0 - c1 * c1) / (n * n))
    a = math.exp(-kl / c2)
    out = []
    for amplitude in ((c1 - n * c2) / (c1 + n * c2), (n * c1 - c2) / (n * c1 + c2)):
        r = amplitude * amplitude
        tau = 0.0 if c1 == 0.0 else a * (1.0 - r) ** 2 / (1.0 - r * r * a * a)
        out.append((tau, r * (1.0 + a * tau)))
    return out


def stack_one(slabs):
    """Transmittance, reflectance and share absorbed in each slab (-), light on the first, nothing behind the last."""
    under = [0.0]  # reflectance of all that lies behind each slab, built from the last forwards
    for tau, rho in reversed(slabs):
        under.insert(0, rho if tau == 0.0 else rho + tau * tau * under[0] / (1.0 - rho * under[0]))
    down, absorbed = 1.0, []
    for i, (tau, rho) in enumerate(slabs):
        below = 0.0 if tau == 0.0 else tau * down / (1.0 - rho * under[i + 1])
        absorbed.append((1.0 - tau - rho) * (down + under[i + 1] * below))
        down = below
    return down, under[0], absorbed


def stack(panes, angle, *, from_beneath=False):
    """As `stack_one`, both polarisations followed through the whole stack and only then averaged (D&B 5.3)."""
    order = list(reversed(panes)) if from_beneath else list(panes)
    optics_of = [pane(n, kl, angle) for n, kl in order]
    s, p = (stack_one([one[k] for one in optics_of]) for k in (0, 1))
    shares = [(x + y) / 2 for x, y in zip(s[2], p[2], strict=True)]
    return (s[0] + p[0]) / 2, (s[1] + p[1]) / 2, shares[::-1] if from_beneath else shares


def plate_absorptance(plate, angle):
    """Absorptance (-) of the plate at an angle; flat black from D&B eq. 4.11.1 to 80 deg, then straight to nothing."""
    alpha, model = plate
    if model == "constant":
        return alpha
    deg = math.degrees(angle)
    f = sum(c * min(deg, 80.0) ** i for i, c in enumerate(FLAT_BLACK))
    return alpha * f * (1.0 if deg <= 80.0 else max(90.0 - deg, 0.0) / 10.0)


def integral(f, low, high, scale, edge=0.0):
    """Adaptive integral of f, to 1e-8 of `scale`, with breaks at `edge` and at the flat-black kink of 80 deg."""
    ends = [low, *sorted(e for e in (edge, math.radians(80.0)) if low < e < high), high]
    return sum(quad(f, *span, epsabs=1e-8 * scale, epsrel=1e-8, limit=200)[0] for span in itertools.pairwise(ends))


def hemisphere(f):
    """Mean (-) of f over uniform diffuse light from a half space: 2 int f sin cos."""
    return integral(lambda t: 2.0 * f(t) * math.sin(t) * math.cos(t), 0.0, HALF_PI, 1.0)


@functools.lru_cache(maxsize=64)
def returned(panes, plate, diffuse):
    """Light thrown back by the plate: reflectance of the stack from beneath, shares absorbed in it, plate's alpha_d."""
    if diffuse == "effective-angle":
        angle = math.radians(60.0)
        _, back, shares = stack(panes, angle, from_beneath=True)
        return back, shares, plate_absorptance(plate, angle)
    beneath = functools.lru_cache(maxsize=None)(lambda t: stack(panes, t, from_beneath=True))
    shares = [hemisphere(lambda t, i=i: beneath(t)[2][i]) for i in range(len(panes))]
    return hemisphere(lambda t: beneath(t)[1]), shares, hemisphere(lambda t: plate_absorptance(plate, t))


def absorbed_shares(panes, plate, diffuse, angle):
    """Shares (-) of light arriving at `angle` that end in the plate and in each cover; D&B 5.5, here summed exactly."""
    alpha = plate_absorptance(plate, angle)
    if not panes:
        return [alpha]
    through, _, shares = stack(panes, angle)
    back, back_shares, alpha_d = returned(panes, plate, diffuse)
    thrown = through * (1.0 - alpha) / (1.0 - (1.0 - alpha_d) * back)
    return [through * alpha + thrown * back * alpha_d] + [
        a + thrown * b for a, b in zip(shares, back_shares, strict=True)
    ]


def effective_angles(tilt_deg):
    """Angles (deg) standing for sky and ground light (Brandemuehl & Beckman 1980, D&B 5.4) and for horizon light."""
    horizon = math.degrees(math.acos(min(math.sin(math.radians(tilt_deg)) * math.pi / 4.0, 1.0)))
    sky = 59.7 - 0.1388 * tilt_deg + 0.001497 * tilt_deg**2
    return sky, 90.0 - 0.5788 * tilt_deg + 0.002693 * tilt_deg**2, horizon


def sky_azimuths(angle, tilt):
    """Share (-) of the azimuths about the plane's normal that look at the sky, at an angle from the normal (rad)."""
    rise, swing = math.cos(angle) * math.cos(tilt), math.sin(angle) * math.sin(tilt)
    if rise >= swing:
        return 1.0
    return math.acos(max(-rise / swing, -1.0)) / math.pi


@functools.lru_cache(maxsize=64)
def diffuse_shares(panes, plate, tilt_deg, diffuse):
    """Shares (-) of sky, ground and horizon light absorbed in the plate and in each cover (three lists)."""
    at = functools.lru_cache(maxsize=None)(lambda angle: absorbed_shares(panes, plate, diffuse, angle))
    if diffuse == "effective-angle":
        return [at(math.radians(deg)) for deg in effective_angles(tilt_deg)]
    tilt, parts = math.radians(tilt_deg), range(len(panes) + 1)
    edge, side = HALF_PI - tilt, math.sin(tilt)  # nearer the normal than `edge`, all is sky
    up, down = (1.0 + math.cos(tilt)) / 4.0, math.sin(tilt / 2.0) ** 2 / 2.0  # integrals of the weights alone

    def from_sky(t, i):
        return at(t)[i] * sky_azimuths(t, tilt) * math.sin(t) * math.cos(t)

    def from_ground(t, i):
        return at(t)[i] * (1.0 - sky_azimuths(t, tilt)) * math.sin(t) * math.cos(t)

    def from_horizon(psi, i):
        return at(math.acos(min(side * math.cos(psi), 1.0)))[i] * math.cos(psi)

    sky = [integral(lambda t, i=i: from_sky(t, i), 0.0, HALF_PI, up, edge) / up for i in parts]
    horizon = [integral(lambda t, i=i: from_horizon(t, i), 0.0, HALF_PI, 1.0) for i in parts]
    if tilt == 0.0:
        return [sky, [0.0 for _ in parts], horizon]  # no ground in sight
    ground = [integral(lambda t, i=i: from_ground(t, i), max(edge, 0.0), HALF_PI, down) / down for i in parts]
    return [sky, ground, horizon]


def optics(build, condition, diffuse="integrated"):
    """Sunlight absorbed in the plate and in each cover, outermost first (W/m2 of collector)."""
    panes = tuple((c["n"], c["kl"]) for c in build["covers"])
    plate = (build["absorptance"], build["angle_model"])
    lights = [condition[name] for name in ("beam", "sky", "ground", "horizon")]
    shares = [absorbed_shares(panes, plate, diffuse, math.radians(condition["incidence_deg"]))]
    shares += diffuse_shares(panes, plate, build["tilt_deg"], diffuse)
    ends = [sum(g * share[i] for g, share in zip(lights, shares, strict=True)) for i in range(len(panes) + 1)]
    return {"absorbed": ends[0], "covers": ends[1:]}


# --- heat flow -------------------------------------------------------------------------------------------------------
def air(t, pressure):
    """Conductivity (W/mK), viscosity (Pa s), heat capacity (J/kgK) and density (kg/m3) of air; fits of the sheet."""
    x = t / 300.0
    k = -5.2476e-4 + x * (3.248843e-2 + x * (-6.559526e-3 + x * 9.80276e-4))
    mu = 1.725752e-7 + x * (2.30805e-5 + x * (-5.550318e-6 + x * 8.345159e-7))
    return k, mu, 1030.228 + x * (-58.92965 + x * 35.16308), pressure / (287.055 * t)


def nu_hollands(ra, tilt_deg):
    """Nusselt number (-) of an inclined layer heated from beneath; Hollands et al. 1976, D&B eq. 3.11.4."""
    x = ra * math.cos(math.radians(tilt_deg))
    if x <= 1708.0:
        return 1.0
    bend = max(1.0 - 1708.0 * math.sin(math.radians(1.8 * tilt_deg)) ** 1.6 / x, 0.0)
    return 1.0 + 1.44 * bend * (1.0 - 1708.0 / x) + max((x / 5830.0) ** (1.0 / 3.0) - 1.0, 0.0)


def nu_vertical(ra, aspect):
    """Nusselt number (-) of an upright layer; ElSherbiny, Raithby & Hollands 1982."""
    if ra <= 0.0:
        return 1.0
    middle = 1.0 + (0.104 * ra**0.293 / (1.0 + (6310.0 / ra) ** 1.36)) ** 3
    return max(0.0605 * ra ** (1.0 / 3.0), middle ** (1.0 / 3.0), 0.242 * (ra / aspect) ** 0.272)


def nu_sixty(ra, aspect):
    """Nusselt number (-) of a layer at 60 deg; ElSherbiny, Raithby & Hollands 1982."""
    g = 0.5 / (1.0 + (ra / 3160.0) ** 20.6) ** 0.1
    first = (1.0 + (0.0936 * ra**0.314 / (1.0 + g)) ** 7) ** (1.0 / 7.0)
    return max(first, (0.104 + 0.175 / aspect) * ra**0.283)


def nu_gap(ra, tilt_deg, aspect, *, heated_beneath):
    """Nusselt number (-) of a gap at any tilt from 0 to 90 deg, with the sheet's joint at 55 to 65 deg."""
    steep = min(max((tilt_deg - 60.0) / 30.0, 0.0), 1.0)
    if not heated_beneath:
        return 1.0 if steep == 0.0 else 1.0 + (nu_vertical(ra, aspect) - 1.0) * steep
    s = min(max((tilt_deg - 55.0) / 10.0, 0.0), 1.0)
    w = s * s * (3.0 - 2.0 * s)
    nu = (1.0 - w) * nu_hollands(ra, tilt_deg) if w < 1.0 else 0.0
    if w > 0.0:
        nu += w * (1.0 - steep) * nu_sixty(ra, aspect)
        nu += w * steep * nu_vertical(ra, aspect) if steep > 0.0 else 0.0
    return nu


def gap_flux(build, pressure, gap, lower, upper):
    """Heat (W/m2) from a lower to an upper surface, each a pair (temperature, emittance), across an air gap (m)."""
    (t_l, e_l), (t_u, e_u) = lower, upper
    mean, rise = (t_l + t_u) / 2.0, t_l - t_u
    k, mu, cp, rho = air(mean, pressure)
    ra = GRAVITY / mean * abs(rise) * gap**3 * rho * rho * cp / (mu * k)
    nu = nu_gap(ra, build["tilt_deg"], build["length"] / gap, heated_beneath=rise > 0.0)
    return SIGMA * (t_l**4 - t_u**4) / (1.0 / e_l + 1.0 / e_u - 1.0) + nu * k / gap * rise


def outer_flux(build, condition, t, emittance):
    """Heat (W/m2) from the outermost face to the wind, the sky and the ground."""
    view = (1.0 + math.cos(math.radians(build["tilt_deg"]))) / 2.0 if condition["longwave_view"] == "tilted" else 1.0
    cold = view * condition["t_sky"] ** 4 + (1.0 - view) * condition["t_ground"] ** 4
    return condition["h_wind"] * (t - condition["t_air"]) + emittance * SIGMA * (t**4 - cold)


def coldest(condition):
    """Lowest temperature (K) around the collector."""
    return min(condition["t_air"], condition["t_sky"], condition["t_ground"])


def falling_root(f, low, first_step, tolerance):
    """Root of a falling function that is not negative at `low` (climbs by doubled steps until it turns negative)."""
    high, step = low + first_step, first_step
    while f(high) > 0.0:
        low, step = high, 2.0 * step
        high = low + step
    return brentq(f, low, high, xtol=tolerance, rtol=1e-14) if f(low) > 0.0 else low


def up_flux(build, condition, suns, level, surface):
    """Heat (W/m2) leaving a surface (t, emittance) upward through covers 0..level, and their temperatures (K).

    Each cover's temperature is a bracketed root whose function solves, in turn, all covers above it.
    """
    if level < 0:
        return outer_flux(build, condition, *surface), []
    cover = build["covers"][level]

    def inflow(t):
        return gap_flux(build, condition["pressure"], cover["gap"], surface, (t, cover["emittance"]))

    def surplus(t):
        return inflow(t) + suns[level] - up_flux(build, condition, suns, level - 1, (t, cover["emittance"]))[0]

    low = min(surface[0], coldest(condition))
    span = max(surface[0], condition["t_air"], condition["t_sky"], condition["t_ground"]) - low + 1.0
    t = falling_root(surplus, low, span, TIGHT)
    return inflow(t), [*up_flux(build, condition, suns, level - 1, (t, cover["emittance"]))[1], t]


def loss(build, condition, covers_absorbed, t_plate):
    """Heat lost by a plate at t_plate (K) to the top, back and edge (W/m2), and the covers' temperatures (K)."""
    surface = (t_plate, build["emittance_plate"])
    q_top, t_covers = up_flux(build, condition, covers_absorbed, len(build["covers"]) - 1, surface)
    back, edge, area = build["back"], build["edge"], build["length"] * build["width"]
    rim = 2.0 * (build["length"] + build["width"]) * edge["height"] / area
    rise = t_plate - condition["t_air"]
    q_back = back["conductivity"] / back["thickness"] * rise
    return q_top, q_back, edge["conductivity"] / edge["thickness"] * rim * rise, t_covers


# --- plate, tube and fluid -------------------------------------------------------------------------------------------
def nu_laminar(re, pr, ratio):
    """Mean Nusselt number (-), laminar, even heat flux, developing (Gnielinski); ratio is d/L."""
    n2 = 1.953 * (re * pr * ratio) ** (1.0 / 3.0) - 0.6
    n3 = 0.924 * pr ** (1.0 / 3.0) * math.sqrt(re * ratio)
    return (4.364**3 + 0.6**3 + n2**3 + n3**3) ** (1.0 / 3.0)


def nu_turbulent(re, pr, ratio):
    """Mean Nusselt number (-), turbulent (Gnielinski 1976); ratio is d/L."""
    e = (0.79 * math.log(re) - 1.64) ** -2 / 8.0
    nu = e * (re - 1000.0) * pr / (1.0 + 12.7 * math.sqrt(e) * (pr ** (2.0 / 3.0) - 1.0))
    return nu * (1.0 + ratio ** (2.0 / 3.0))


def film(build, t):
    """Mean film coefficient (W/m2K) in the tube for fluid at t (K)."""
    cp, mu, k = build["fluid"](t)
    d, length = build["d_inner"], build["length"]
    re = 4.0 * build["flow"] * build["pitch"] * length / (math.pi * d * mu)
    pr, ratio, g = mu * cp / k, d / length, (re - 2300.0) / 7700.0
    if g <= 0.0:
        return nu_laminar(re, pr, ratio) * k / d
    if g >= 1.0:
        return nu_turbulent(re, pr, ratio) * k / d
    return ((1.0 - g) * nu_laminar(2300.0, pr, ratio) + g * nu_turbulent(1e4, pr, ratio)) * k / d


def fin_efficiency(build, u):
    """Efficiency (-) of the plate as a fin between tubes; D&B eq. 6.5.12."""
    m = math.sqrt(u / (build["k_plate"] * build["delta"])) * (build["pitch"] - build["d_outer"]) / 2.0
    return math.tanh(m) / m


def efficiency_factor(build, u, h_film):
    """F' (-), D&B eq. 6.5.18."""
    w, d = build["pitch"], build["d_outer"]
    bond = 0.0 if build["bond"] is None else 1.0 / build["bond"]
    fin = 1.0 / (u * (d + (w - d) * fin_efficiency(build, u)))
    return 1.0 / (u * w * (fin + bond + 1.0 / (math.pi * build["d_inner"] * h_film)))


def removal_factor(u, f_prime, capacity):
    """F_R (-), D&B eq. 6.7.4; capacity is the flow's m cp in W/m2K."""
    return capacity / u * -math.expm1(-u * f_prime / capacity)


def loss_line(build, condition, suns, t):
    """Total loss (W/m2) of a plate at t (K), its slope there (W/m2K) and the jump of slope, by differences."""
    below, here, above = (sum(loss(build, condition, suns, t + x)[:3]) for x in (-DIFFERENCE, 0.0, DIFFERENCE))
    return here, (above - below) / (2.0 * DIFFERENCE), (above - 2.0 * here + below) / DIFFERENCE


def carried(build, u, t_plate, t_fluid, h_film=None):
    """Gain (W/m2) that the temperature drop from plate to fluid can carry: F' U (t_p - t_f) / (1 - F')."""
    if t_fluid >= t_plate:
        return 0.0
    f = efficiency_factor(build, u, film(build, t_fluid) if h_film is None else h_film)
    return f * u * (t_plate - t_fluid) / (1.0 - f)


def mean_fluid(build, u, q, t_plate, t_inlet):
    """Mean fluid temperature (K), not under the inlet's, at which the plate hands over q; its film taken there."""
    if q <= 0.0:
        return t_plate
    if carried(build, u, t_plate, t_inlet) <= q:
        return t_inlet
    return brentq(lambda t: carried(build, u, t_plate, t) - q, t_inlet, t_plate, xtol=TIGHT, rtol=1e-14)


def running_plate(build, condition, suns, sun, t_stagnation):
    """Plate temperature (K) and mean fluid temperature (K) of a collector that runs."""
    inlet = condition.get("t_inlet")

    def fluid_at(t, u, q):
        return condition["t_mean"] if inlet is None else mean_fluid(build, u, q, t, inlet)

    def excess(t):
        if t >= t_stagnation:
            return -1.0
        here, u, _ = loss_line(build, condition, suns, t)
        q = sun - here
        t_fluid = fluid_at(t, u, q)
        if inlet is None:
            return q - carried(build, u, t, t_fluid)
        if q <= 0.0:
            return -1.0
        return inlet + inlet_to_mean(build, u, q, t_fluid) - t_fluid

    start = condition["t_mean"] if inlet is None else inlet
    t = brentq(excess, start, t_stagnation, xtol=1e-9, rtol=1e-14)
    here, u, _ = loss_line(build, condition, suns, t)
    return t, fluid_at(t, u, sun - here)


def inlet_to_mean(build, u, q, t_fluid):
    """Rise (K) from the inlet to the mean fluid temperature, D&B eq. 6.9.2: q / (F_R U) (1 - F_R / F')."""
    f = efficiency_factor(build, u, film(build, t_fluid))
    f_r = removal_factor(u, f, build["flow"] * build["fluid"](t_fluid)[0])
    return q / (f_r * u) * (1.0 - f_r / f)


def stagnation(build, condition, suns, sun):
    """Plate temperature (K) at which no heat is drawn and all sunlight is lost."""
    return falling_root(lambda t: sun - sum(loss(build, condition, suns, t)[:3]), coldest(condition), 60.0, 1e-9)


def solve(build, condition, diffuse="integrated"):
    """Steady state: temperatures (K), heat flows (W/m2), slope of the loss (W/m2K) and factors (-).

    When it does not run, f_prime, f_r, t_mean and t_outlet are NaN. `kink` says that the slope of the loss jumps at
    the answer (convection sets in), where a tangent is not defined and no close agreement should be asked.
    """
    light = optics(build, condition, diffuse)
    sun, suns = light["absorbed"], light["covers"]
    t = stagnation(build, condition, suns, sun)
    start = condition.get("t_inlet", condition.get("t_mean", math.inf))
    running, t_mean = t > start, math.nan
    if running:
        t, t_mean = running_plate(build, condition, suns, sun, t)
    q_top, q_back, q_edge, t_covers = loss(build, condition, suns, t)
    _, u, jump = loss_line(build, condition, suns, t)
    q = sun - (q_top + q_back + q_edge) if running else 0.0
    f = f_r = t_outlet = math.nan
    if running:
        f = efficiency_factor(build, u, film(build, t_mean))
        capacity = build["flow"] * build["fluid"](t_mean)[0]
        f_r = removal_factor(u, f, capacity)
        t_outlet = t_mean - inlet_to_mean(build, u, q, t_mean) + q / capacity
    flows = {"q_useful": q, "q_top": q_top, "q_back": q_back, "q_edge": q_edge, "absorbed": sun}
    factors = {"u_loss": u, "f_prime": f, "f_r": f_r, "running": running, "kink": abs(jump) > 5e-3}
    return {"t_plate": t, "t_covers": t_covers, "t_mean": t_mean, "t_outlet": t_outlet, **flows, **factors}


def march(build, condition, steps=20, diffuse="integrated"):
    """Useful gain (W/m2) and outlet temperature (K) by going along the tube (Runge-Kutta 4), inlet given.

    Each station has its own plate temperature, covers and tangent; film and heat capacity are those of the mean fluid
    temperature, repeated until it stands still.
    """
    light = optics(build, condition, diffuse)
    sun, suns, t_in = light["absorbed"], light["covers"], condition["t_inlet"]
    hottest = stagnation(build, condition, suns, sun)
    if hottest <= t_in:
        return 0.0, math.nan

    def gain(t_fluid, h_film):
        def excess(t):
            here, u, _ = loss_line(build, condition, suns, t)
            return sun - here - carried(build, u, t, t_fluid, h_film)

        t = brentq(excess, t_fluid, hottest, xtol=1e-8) if t_fluid < hottest - 1e-8 else hottest
        return sun - sum(loss(build, condition, suns, t)[:3])

    t_mean = running_plate(build, condition, suns, sun, hottest)[1]
    for _ in range(20):
        h_film, rate = film(build, t_mean), 1.0 / (steps * build["flow"] * build["fluid"](t_mean)[0])
        t, total = t_in, 0.0
        for _ in range(steps):
            k1 = rate * gain(t, h_film)
            k2 = rate * gain(t + k1 / 2.0, h_film)
            k3 = rate * gain(t + k2 / 2.0, h_film)
            rise = (k1 + 2.0 * k2 + 2.0 * k3 + rate * gain(t + k3, h_film)) / 6.0
            total += t + rise / 2.0
            t += rise
        change, t_mean = total / steps - t_mean, total / steps
        if abs(change) < 1e-3:
            break
    return (t - t_in) / (rate * steps), t


# --- random cases ----------------------------------------------------------------------------------------------------
def between(rng, low, high, *, log=False):
    """A draw from low to high, even in the value or in its logarithm; any rng with a `random()` will do."""
    x = rng.random()
    return low * (high / low) ** x if log else low + (high - low) * x


def pick(rng, *choices):
    """One of the choices."""
    return choices[int(rng.random() * len(choices))]


BUILD = {  # lowest, highest
    "length": (0.5, 6.0),
    "width": (0.5, 2.5),
    "absorptance": (0.3, 0.98),
    "emittance_plate": (0.03, 0.95),
    "k_plate": (15.0, 400.0),
    "delta": (0.0002, 0.002),
    "pitch": (0.06, 0.2),
    "d_outer": (0.006, 0.022),
}
COVER = {"n": (1.1, 1.7), "kl": (0.0, 0.1), "emittance": (0.1, 0.95), "gap": (0.005, 0.08)}
BACK = {"thickness": (0.02, 0.1), "conductivity": (0.02, 0.06)}
EDGE = {"thickness": (0.01, 0.05), "conductivity": (0.02, 0.06), "height": (0.04, 0.15)}


def random_build(rng):
    """A collector drawn at random, but for its fluid."""
    build, back, edge, *covers = (
        {name: between(rng, *ends) for name, ends in table.items()}
        for table in (BUILD, BACK, EDGE, *pick(rng, [], [COVER], [COVER] * 2, [COVER] * 3))
    )
    for cover in covers:
        cover["kl"] *= pick(rng, 0.0, 1.0, 1.0, 1.0)
    build |= {"back": back, "edge": edge, "covers": covers, "angle_model": pick(rng, "constant", "flat-black")}
    build["tilt_deg"] = pick(
        rng, 0.0, 60.0, 90.0, between(rng, 55.0, 65.0), *(between(rng, 0.0, 90.0) for _ in range(6))
    )
    build["d_inner"] = build["d_outer"] - between(rng, 0.0006, 0.002)
    build["bond"] = pick(rng, None, between(rng, 5.0, 100.0, log=True))
    return build | {"flow": between(rng, 0.001, 0.05, log=True)}


def random_case(rng):
    """A build and a condition drawn at random; build["fluid"] is a pair (name, glycol mass fraction, 0 for water)."""
    build, t_air, total, beam = random_build(rng), between(rng, 243.15, 318.15), between(rng, 0.0, 1100.0), rng.random()
    total *= pick(rng, 0.0, *(1.0,) * 7)
    tilt, t_sky = math.radians(build["tilt_deg"]), t_air + between(rng, -40.0, 8.0)
    parts = (between(rng, 0.1, 1.0), rng.random() * math.sin(tilt), rng.random() * (1.0 - math.cos(tilt)) / 2.0)
    condition = {
        name: total * (1.0 - beam) * x / sum(parts) for name, x in zip(("sky", "horizon", "ground"), parts, strict=True)
    }
    condition |= {
        "beam": total * beam,
        "incidence_deg": pick(rng, 0.0, 90.0, *(between(rng, 0.0, 90.0) for _ in range(8))),
    }
    condition |= {"t_air": t_air, "t_sky": t_sky, "t_ground": t_air + between(rng, -10.0, 15.0)}
    condition |= {"h_wind": 2.8 + 3.0 * between(rng, 0.0, 15.0) * pick(rng, 0.0, 1.0, 1.0, 1.0)}
    condition |= {"pressure": between(rng, 70e3, 101325.0), "longwave_view": pick(rng, "tilted", "sky")}
    # mostly a fluid within reach of the air, so that the collector runs; else anything from -10 to 120 C
    t_fluid = between(rng, 263.15, 393.15) if rng.random() < 0.3 else t_air + between(rng, -30.0, 50.0)
    t_fluid = min(max(t_fluid, 263.15), 393.15)
    mode = pick(rng, "t_inlet", "t_inlet", "t_inlet", "t_inlet", "t_mean", "t_mean", "stagnation")
    condition[mode] = True if mode == "stagnation" else t_fluid
    name = pick(rng, "propylene glycol", "ethylene glycol", *(("water",) * 2 if t_fluid > 276.15 else ()))
    build["fluid"] = (name, 0.0 if name == "water" else between(rng, 0.3, 0.5))
    return build, condition
