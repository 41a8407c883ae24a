"""The whole chain for one planet, one draw and one background in plain floats, written from the equations alone.

Nothing here comes from keptair: every number is restated beside the section of the model description it stands in, so
that the pipeline's arrays can be held against a second hand. Catalogue units at the edges, SI between them.
"""

import math
from collections.abc import Iterable, Mapping
from typing import Any

Row = Mapping[str, Any]

# 0. Constants: IAU 2015 B3 nominal values, CODATA 2018, au IAU 2012
GRAVITATION = 6.67430e-11
BOLTZMANN = 1.380649e-23
PLANCK = 6.62607015e-34
LIGHT_SPEED = 299792458.0
STEFAN_BOLTZMANN = 2.0 * math.pi**5 * BOLTZMANN**4 / (15.0 * PLANCK**3 * LIGHT_SPEED**2)
UNIT = 1.66053906660e-27
SUN_MASS = 1.3271244e20 / GRAVITATION
SUN_RADIUS = 6.957e8
SUN_LUMINOSITY = 3.828e26
EARTH_MASS = 3.986004e14 / GRAVITATION
EARTH_RADIUS = 6.3781e6
ASTRONOMICAL_UNIT = 149597870700.0
DAY = 86400.0
GIGAYEAR = 1e9 * 365.25 * DAY
SOLAR_CONSTANT = 1361.0

# fmt: off
# 0 and 4. CIAAW standard weights
GASES = {
    "h": 1.008, "h2": 2.016, "he": 4.002602, "ch4": 16.043, "nh3": 17.031, "h2o": 18.015, "ne": 20.1797, "n": 14.007,
    "n2": 28.014, "co": 28.010, "o": 15.999, "o2": 31.998, "ar": 39.95, "co2": 44.009, "so2": 64.058,
}

# 3. main gas, mass below and above, key escaper, anchor T_a, F_a, g_a, T_b,a, cross-section, inventory, efficiency
BACKGROUNDS: dict[str, tuple[Any, ...]] = {
    "co2": ("co2", 44.0, 30.0, "o", 300.0, 1.911, 8.87, 193.0, 3e-19, (1e-5, 1e-3), (0.01, 0.1)),
    "n2": ("n2", 28.97, 20.0, "n", 1000.0, 1.0, 9.80, 214.0, 2e-19, (1e-6, 1e-4), (0.01, 0.1)),
    "n2_icy": ("n2", 28.0, 27.0, "n2", 150.0, 0.0109, 1.354, 71.0, 3e-19, (1e-5, 1e-3), (0.01, 0.1)),
    "h2": ("h2", 2.3, 1.3, "h", 900.0, 0.0370, 24.8, 92.0, 2e-19, (0.003, 0.05), (0.05, 0.2)),
    "steam": ("h2o", 18.0, 6.0, "h", 1000.0, 18.0 / 28.97, 9.80, 214.0, 2e-19, (1e-4, 1e-2), (0.05, 0.2)),
}
AIR = ["main", "below", "above", "key", "anchor_t", "anchor_f", "anchor_g", "anchor_skin", "cross_section", "inventory",
       "efficiency"]

# 5. whom a trace has to diffuse through, the first that the table knows
PARTNERS = {"co2": ("co2",), "n2": ("air", "n2"), "n2_icy": ("n2",), "h2": ("h2",), "steam": ("h2o",)}

# 12. b = A T^s in cm⁻¹ s⁻¹, and diameters in pm
DIFFUSION = {
    ("h2", "air"): (2.67e17, 0.750), ("h2", "n2"): (3.94e17, 0.686), ("h2", "co2"): (1.77e17, 0.789),
    ("he", "air"): (2.78e17, 0.729), ("he", "n2"): (3.29e17, 0.699), ("he", "co2"): (2.41e17, 0.722),
    ("ch4", "n2"): (7.42e16, 0.748), ("ch4", "h2"): (2.30e17, 0.765), ("co", "air"): (8.29e16, 0.729),
    ("ar", "air"): (6.65e16, 0.751), ("h2o", "air"): (4.72e16, 0.860), ("co2", "air"): (3.77e16, 0.823),
    ("h", "air"): (4.87e17, 0.698), ("h", "co2"): (8.4e17, 0.60), ("h", "h2"): (1.05e18, 0.687),
}
DIAMETERS = {
    "h2": 271, "he": 215, "ch4": 414, "nh3": 432, "h2o": 350, "ne": 254, "n2": 370, "co": 376, "o2": 355, "ar": 358,
    "co2": 453, "so2": 411, "h": 205, "n": 330, "o": 275,
}
# fmt: on

# The catalogue's physical bounds, which are also where draws are cut; e is drawn to 0.95, age from 0.01 Gyr
BOUNDS = {
    "planet_radius_rearth": (1e-3, 100.0),
    "planet_mass_mearth": (1e-4, 1e5),
    "orbital_period_d": (0.01, 1e9),
    "semi_major_axis_au": (1e-4, 1e5),
    "eccentricity": (0.0, 0.95),
    "insolation_earth": (1e-9, 1e7),
    "bond_albedo": (0.0, 0.99),
    "stellar_teff_k": (250.0, 2e5),
    "stellar_radius_rsun": (1e-3, 2e3),
    "stellar_mass_msun": (0.005, 200.0),
    "stellar_luminosity_lsun": (1e-8, 1e7),
    "stellar_age_gyr": (0.01, 13.8),
}
LONGEST = 1e30 * GIGAYEAR


def normal_share(z: float) -> float:
    """Φ(z)."""
    return 0.5 * math.erfc(-z / math.sqrt(2.0))


def normal_quantile(share: float) -> float:
    """Φ⁻¹ by halving, then Newton; from the lower tail, where erfc keeps its digits."""
    share = min(max(share, 2.0**-53), 1.0 - 2.0**-53)
    if share == 0.5:
        return 0.0
    if share > 0.5:
        return -normal_quantile(1.0 - share)
    low, high = -9.0, 0.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if normal_share(middle) < share else (low, middle)
    z = 0.5 * (low + high)
    return z - (normal_share(z) - share) / (math.exp(-0.5 * z * z) / math.sqrt(2.0 * math.pi))


def between(u: float, low: float, high: float) -> float:
    """Uniform."""
    return low + u * (high - low)


def between_logarithms(u: float, low: float, high: float) -> float:
    """Log-uniform; u = ½ is the geometric mean."""
    return math.exp(between(u, math.log(low), math.log(high)))


def draw_of(row: Row, name: str, u: Mapping[str, float]) -> float | None:
    """7 and the notes on draws: one drawn value of a catalogue column, None where the catalogue has none.

    value + σ₊z above, value + σ₋z below; u is rescaled between the bounds' Φ. u = ½ is the value as catalogued (6).
    """
    value = row.get(name)
    if value is None:
        return None
    share = u[name]
    low, high = BOUNDS[name]
    limit = row.get(name + "_bound", "")
    if limit == "upper":
        return between(share, low, value)
    if limit == "lower":
        return between_logarithms(share, value, min(3.0 * value, high))
    plus, minus = row.get(name + "_err_plus"), row.get(name + "_err_minus")
    plus, minus = (plus or minus), (minus or plus)
    if not plus or share == 0.5:
        return value
    lowest = normal_share((low - value) / (minus if low < value else plus))
    highest = normal_share((high - value) / (minus if high < value else plus))
    z = normal_quantile(lowest + share * (highest - lowest))
    return value + (plus if z > 0.0 else minus) * z


def luminosity_and_mass(row: Row, u: Mapping[str, float]) -> tuple[float | None, float | None]:
    """1. L: catalogue, else 4πR*²σT⁴ [L☉]. M*: catalogue, else from L [M☉]."""
    luminosity = draw_of(row, "stellar_luminosity_lsun", u)
    radius, temperature = draw_of(row, "stellar_radius_rsun", u), draw_of(row, "stellar_teff_k", u)
    if luminosity is None and radius is not None and temperature is not None:
        surface = 4.0 * math.pi * (radius * SUN_RADIUS) ** 2
        luminosity = surface * STEFAN_BOLTZMANN * temperature**4 / SUN_LUMINOSITY
    mass = draw_of(row, "stellar_mass_msun", u)
    if mass is None and luminosity is not None:
        mass = (luminosity / 0.23) ** (1.0 / 2.3) if luminosity < 0.033 else luminosity**0.25
    return luminosity, mass


def semi_major_axis(row: Row, u: Mapping[str, float], star_mass: float | None) -> float | None:
    """1. a: catalogue, else Kepler's third law from P and M* [au]."""
    axis, period = draw_of(row, "semi_major_axis_au", u), draw_of(row, "orbital_period_d", u)
    if axis is None and period is not None and star_mass is not None:
        cube = GRAVITATION * star_mass * SUN_MASS * (period * DAY / (2.0 * math.pi)) ** 2
        axis = cube ** (1.0 / 3.0) / ASTRONOMICAL_UNIT
    return axis


def radius_from_mass(mass: float, z: float) -> float:
    """7. Chen & Kipping 2017, R = C M^S e^{σN}."""
    if mass < 2.04:
        return 1.008 * mass**0.279 * math.exp(0.040 * z)
    if mass < 131.6:
        return 0.808 * mass**0.589 * math.exp(0.146 * z)
    return 17.74 * mass**-0.044 * math.exp(0.074 * z)


def mass_from_radius(radius: float, u: float) -> float:
    """7. The same inverted, scatter σ/S in ln M; above 9 R⊕ ln M is uniform over 60–4000 M⊕."""
    if radius >= 9.0:
        return between_logarithms(u, 60.0, 4000.0)
    factor, slope, scatter = (1.008, 0.279, 0.040) if radius < 1.23 else (0.808, 0.589, 0.146)
    return (radius / factor) ** (1.0 / slope) * math.exp(scatter / slope * normal_quantile(u))


def mass_and_radius(row: Row, u: Mapping[str, float]) -> tuple[float, float, bool]:
    """7. Gaps filled, M sin i turned into a mass; the third says whether the radius is measured [M⊕, R⊕]."""
    mass = None if row.get("planet_mass_kind") == "relation" else draw_of(row, "planet_mass_mearth", u)
    radius = None if row.get("planet_radius_kind") == "relation" else draw_of(row, "planet_radius_rearth", u)
    measured = radius is not None and row.get("planet_radius_rearth_bound", "") == ""
    transits = measured or row.get("transits") == "yes"
    if mass is not None and row.get("planet_mass_kind") == "minimum" and not transits:
        cosine = between(u["inclination"], 0.0, 0.996)
        mass /= math.sqrt(1.0 - cosine * cosine)
    if mass is None:
        mass = mass_from_radius(radius, u["mass_radius"])
    if radius is None:
        radius = radius_from_mass(mass, normal_quantile(u["mass_radius"]))
    return max(mass, 1e-4), max(radius, 1e-3), measured


def hydrogen_share(mass: float, radius: float, insolation: float, age: float) -> float:
    """7. Lopez & Fortney 2014 inverted; 0.1 % where the radius asks for none."""
    envelope = max(0.0, radius - 1.00 * mass ** (1.0 / 3.7))
    unit = 2.06 * mass**-0.21 * insolation**0.044 * (age / 5.0) ** -0.18
    return min(max(0.05 * (envelope / unit) ** (1.0 / 0.59), 0.001), 0.9)


def xuv_share(star_mass: float, luminosity: float | None, gigayears: float, scatter_dex: float) -> float:
    """2. L_XUV/L of the saturated power law, a giant's light capped at 2 L☉ M⁴."""
    saturation = 0.066 * min(star_mass, 1.3) ** -1.6
    share = 10.0**-3.2 * (1.0 if gigayears < saturation else (gigayears / saturation) ** -1.23)
    if luminosity is not None and star_mass > 0.6:
        share *= min(luminosity, 2.0 * star_mass**4) / luminosity
    return share * 10.0**scatter_dex


def binary_diffusion(gas: str, background: str, temperature: float) -> float:
    """5 and 12. b_i in m⁻¹ s⁻¹; hard spheres after Chapman and Enskog where the table has no pair."""
    for partner in PARTNERS[background]:
        for pair in ((gas, partner), (partner, gas)):
            if pair in DIFFUSION:
                factor, exponent = DIFFUSION[pair]
                return 100.0 * factor * temperature**exponent
    partner = PARTNERS[background][-1]
    one, other = GASES[gas] * UNIT, GASES[partner] * UNIT
    diameter = 0.5e-12 * (DIAMETERS[gas] + DIAMETERS[partner])
    speed = math.sqrt(BOLTZMANN * temperature * (one + other) / (2.0 * math.pi * one * other))
    return 3.0 / (8.0 * diameter**2) * speed


def upper_air(body: Row, air: Row, xuv_earth: float, exponent: float) -> dict[str, Any]:
    """3. Exobase temperature, radius, density under an XUV flux in units of Earth's."""
    mass, radius, gravity, skin = body["mass"], body["radius"], body["gravity"], body["skin"]
    heat = (air["anchor_t"] ** exponent - air["anchor_skin"] ** exponent) * (xuv_earth / air["anchor_f"])
    conduction = (skin**exponent + heat * (air["anchor_g"] / gravity)) ** (1.0 / exponent)
    temperature = min(conduction, 1e4)
    exobase_pressure = air["above"] * UNIT * gravity / air["cross_section"]
    below = BOLTZMANN * body["equilibrium"] / (GRAVITATION * mass * air["below"] * UNIT) * math.log(1e5 / 0.1)
    warm = 0.75 * temperature + 0.25 * skin
    above = BOLTZMANN * warm / (GRAVITATION * mass * air["above"] * UNIT) * math.log(0.1 / exobase_pressure)
    inverse = 1.0 / radius - below - above
    floor = 1.0 / (30.0 * radius)
    if body["roche"] is not None:
        floor = max(floor, 1.0 / (body["roche"] * radius))
    state: dict[str, Any] = {"conduction": conduction, "temperature": temperature, "bound": inverse >= floor}
    state["pressure_ratio"] = exobase_pressure / 0.1
    if state["bound"]:
        state["radius"] = 1.0 / inverse
        local = GRAVITATION * mass * inverse**2
        height = BOLTZMANN * temperature / (air["above"] * UNIT * local)
        state["density"] = 1.0 / (air["cross_section"] * height)
    return state


def jeans_parameter(body: Row, state: Row, weight: float) -> float:
    """4. λ = GMm/(kT r)."""
    return GRAVITATION * body["mass"] * weight * UNIT / (BOLTZMANN * state["temperature"] * state["radius"])


def jeans_flux(body: Row, state: Row, weight: float, correction: float, separation: float) -> float:
    """4. φ_J per m² of surface; `separation` is ln(X_exo / X_h)."""
    binding = jeans_parameter(body, state, weight)
    speed = math.sqrt(2.0 * BOLTZMANN * state["temperature"] / (weight * UNIT))
    kept = math.exp(max(math.log1p(binding) - binding + separation, -600.0))
    widening = (state["radius"] / body["radius"]) ** 2
    return correction * state["density"] * speed / (2.0 * math.sqrt(math.pi)) * kept * widening


def energy_limit(body: Row, state: Row, key: str, xuv: float, efficiency: float) -> float:
    """5. φ_E = ε F_XUV (r_x/R)² R/(4GMK), kg m⁻² s⁻¹ of surface."""
    radius, roche = body["radius"], body["roche"]
    widest = (1.3 if key == "h2" else 3.0) * radius
    reach = min(widest, state["radius"]) if state["bound"] else widest
    barrier = 1.0
    if roche is not None:
        reach = min(reach, roche * radius)
        barrier = max(1.0 - 1.5 / roche + 0.5 / roche**3 if roche > 1.0 else 0.0, 0.02)
    reach = max(reach, radius)
    return efficiency * xuv * (reach / radius) ** 2 * radius / (4.0 * GRAVITATION * body["mass"] * barrier)


def one_epoch(
    body: Row, key: str, air: Row, draw: Row, xuv: float, excess_heat: str, gases: Iterable[str]
) -> dict[str, Any]:
    """5. Regime, loss and escape times [s] of the background and of every trace under one XUV flux [W m⁻²]."""
    state = upper_air(body, air, xuv / 4.64e-3, draw["exponent"])
    limit = energy_limit(body, state, key, xuv, draw["efficiency"])
    column = draw["inventory"] * body["mass"] / (4.0 * math.pi * body["radius"] ** 2)
    hydrogen, held = (2.0 / 3.0, 0.1119 * column) if key == "steam" else (1.0, column)
    weight = GASES[air["key"]]
    outflow = not state["bound"] or jeans_parameter(body, state, weight) < 2.5
    outflow = outflow or (excess_heat == "outflow" and state["conduction"] > 1e4)
    loss, kinetic = limit, None
    if state["bound"]:
        kinetic = jeans_flux(body, state, weight, draw["correction"], 0.0) * hydrogen
        if not outflow:
            loss = min(kinetic * weight * UNIT, limit)
    state |= {"regime": "outflow" if outflow else "evaporation", "loss": loss, "energy_limit": limit}
    state |= {"kinetic": kinetic, "escape_time": held / max(loss, held / LONGEST), "traces": {}, "jeans": {}}
    particles = column / (air["below"] * UNIT)
    for gas in gases:
        if state["bound"]:
            state["jeans"][gas] = jeans_parameter(body, state, GASES[gas])
        if gas != air["main"]:
            state["traces"][gas] = trace(body, key, air, draw, state, gas, particles)
    return state


def trace(body: Row, key: str, air: Row, draw: Row, state: Row, gas: str, particles: float) -> dict[str, Any]:
    """4 and 5. Fluxes of a trace per unit mixing ratio at the homopause [m⁻² s⁻¹] and its escape time [s]."""
    weight = GASES[gas]
    drift = binary_diffusion(gas, key, body["skin"]) * (air["below"] - weight) * UNIT * body["gravity"]
    drift /= BOLTZMANN * body["skin"]
    kinetic = None
    if state["bound"]:
        separation = (weight / air["above"] - 1.0) * math.log(state["pressure_ratio"])
        kinetic = jeans_flux(body, state, weight, draw["correction"], separation)
    supply = drift if weight < air["below"] else None
    flux, limited_by = kinetic, "kinetic"
    if state["regime"] == "outflow":
        wind = state["loss"] / ((0.1119 if key == "steam" else 1.0) * air["below"] * UNIT)
        flux, limited_by = max(0.0, wind + drift), "energy"
    elif supply is not None:
        flux = kinetic * supply / (kinetic + supply) if kinetic + supply > 0.0 else 0.0
        limited_by = "supply" if supply < kinetic else "kinetic"
    escape_time = particles / max(flux, particles / LONGEST)
    return {"kinetic": kinetic, "supply": supply, "flux": flux, "limited_by": limited_by, "escape_time": escape_time}


def lost(times: list[float], states: list[dict[str, Any]], gas: str | None) -> float:
    """6. Λ = ∫ dt/τ by the trapezoid rule in ln t; of the background where `gas` is None."""
    rates = [
        time * GIGAYEAR / (state["escape_time"] if gas is None else state["traces"][gas]["escape_time"])
        for time, state in zip(times, states, strict=True)
    ]
    step = math.log(times[-1] / times[0]) / (len(times) - 1)
    return step * (math.fsum(rates) - 0.5 * (rates[0] + rates[-1]))


class Middle(dict[str, float]):
    """Every u = ½: the central draw."""

    def __missing__(self, name: str) -> float:
        return 0.5


def planet(row: Row, u: Mapping[str, float]) -> dict[str, Any]:
    """1 and 7. Star, orbit and body of one draw; `roche` is ξ, None without an orbit."""
    luminosity, star_mass = luminosity_and_mass(row, u)
    axis = semi_major_axis(row, u, star_mass)
    eccentricity = draw_of(row, "eccentricity", u) or 0.0
    insolation = draw_of(row, "insolation_earth", u)
    if luminosity is not None and axis is not None:
        insolation = luminosity / axis**2
    if insolation is None or star_mass is None:
        raise ValueError("no insolation or no star's mass: unassessed")
    mean_insolation = insolation / math.sqrt(1.0 - eccentricity**2)
    albedo = draw_of(row, "bond_albedo", u)
    albedo = between(u["bond_albedo"], 0.0, 0.5) if albedo is None else albedo
    age = draw_of(row, "stellar_age_gyr", u)
    age = between(u["stellar_age_gyr"], 1.0, 10.0) if age is None else age
    mass, radius, measured = mass_and_radius(row, u)

    body: dict[str, Any] = {"luminosity": luminosity, "star_mass": star_mass, "axis": axis, "insolation": insolation}
    body |= {"mean_insolation": mean_insolation, "age": age, "mass": mass * EARTH_MASS, "radius": radius * EARTH_RADIUS}
    body["hydrogen_share"] = hydrogen_share(mass, radius, insolation, age) if measured else None
    body["equilibrium"] = (mean_insolation * SOLAR_CONSTANT * (1.0 - albedo) * 0.25 / STEFAN_BOLTZMANN) ** 0.25
    body["skin"] = body["equilibrium"] / 2.0**0.25
    body["gravity"] = GRAVITATION * body["mass"] / body["radius"] ** 2
    body["roche"] = None
    if axis is not None:
        periapsis = axis * (1.0 - eccentricity) * ASTRONOMICAL_UNIT
        body["roche"] = periapsis * (body["mass"] / (3.0 * star_mass * SUN_MASS)) ** (1.0 / 3.0) / body["radius"]
    return body


def chain(
    row: Row, key: str, u: Mapping[str, float] | None = None, epochs: int = 16, scatter_dex: float = 0.4,
    excess_heat: str = "outflow", gases: Iterable[str] = tuple(GASES),
) -> dict[str, Any]:  # fmt: skip
    """From catalogue values to the share lost since t₀, for one draw (central by default) and one background."""
    u = Middle() if u is None else u
    air = dict(zip(AIR, BACKGROUNDS[key], strict=True))
    body = planet(row, u)
    draw = {
        "exponent": between(u["conduction"], 0.7, 1.2),
        "efficiency": between_logarithms(u["efficiency"], *air["efficiency"]),
        "correction": between_logarithms(u["jeans_correction"], 0.5, 1.7),
        "inventory": between_logarithms(u["inventory"], *air["inventory"]),
    }
    if key == "h2" and body["hydrogen_share"] is not None:
        draw["inventory"] = body["hydrogen_share"]
    scatter = scatter_dex * normal_quantile(u["xuv_scatter"])

    def at(gigayears: float) -> dict[str, Any]:
        share = xuv_share(body["star_mass"], body["luminosity"], gigayears, scatter)
        xuv = share * SOLAR_CONSTANT * body["mean_insolation"]
        return {"xuv": xuv / 4.64e-3} | one_epoch(body, key, air, draw, xuv, excess_heat, gases)

    start = min(between_logarithms(u["start"], 0.1, 0.5), 0.5 * body["age"])
    times = [start * (body["age"] / start) ** (i / (epochs - 1)) for i in range(epochs)]
    states = [at(time) for time in times]
    traces_lost = {gas: lost(times, states, gas) for gas in states[-1]["traces"]}
    return {
        "body": body, "draw": draw, "start": start, "now": at(body["age"]),
        "inventories_lost": lost(times, states, None), "traces_lost": traces_lost,
    }  # fmt: skip
