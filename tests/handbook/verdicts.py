"""What is known of the Solar System's air, against the verdicts of the default settings."""

from __future__ import annotations

from functools import cache, partial

from handbook.check import Check, words
from handmade import make_batch, solar_system
from keptair import stages
from keptair.settings import Settings

GONE = "Surface pressures below 1e-7 Pa: NASA planetary fact sheets"
ICY = "Hall et al. 1998, doi:10.1086/305604; Carlson 1999, doi:10.1126/science.283.5403.820: exospheres"
VOLCANIC = "Lellouch et al. 2007, doi:10.1007/978-3-540-48841-5_10: nanobars of volcanic SO2, not kept"
KEPT = "NASA planetary fact sheets: 92 and 1.0 bar"
DEPLETED_MARS = "Jakosky et al. 2018, doi:10.1016/j.icarus.2018.05.030: 6 mbar left of far more"
DEPLETED_TITAN = "Mandt et al. 2014, doi:10.1088/2041-8205/788/2/L24: 1.5 bar left, nitrogen isotopes enriched by loss"
FROST = "Gladstone et al. 2016, doi:10.1126/science.aad8866; Broadfoot et al. 1989: air in balance with its ice, 1 Pa"
GIANTS = "Guillot 2005, doi:10.1146/annurev.earth.32.101802.120325: envelopes of hydrogen and helium"
KNOWN = {
    "mercury": (words("bare"), GONE),
    "moon": (words("bare"), GONE),
    "io": (words("bare"), VOLCANIC),
    "ganymede": (words("bare"), ICY),
    "callisto": (words("bare"), ICY),
    "venus": (words("secondary"), KEPT),
    "earth": (words("secondary"), KEPT),
    "mars": (words("undecided", "secondary"), DEPLETED_MARS),
    "titan": (words("undecided", "secondary"), DEPLETED_TITAN),
    "triton": (words("bare", "undecided"), FROST),
    "pluto": (words("bare", "undecided"), FROST),
    "jupiter": (words("envelope"), GIANTS),
    "saturn": (words("envelope"), GIANTS),
    "uranus": (words("envelope"), GIANTS),
    "neptune": (words("envelope"), GIANTS),
}
SCATTERS = (0.2, 0.4)  # [dex] of the star's XUV: known for the Sun, and the default


@cache
def assessed(scatter: float) -> dict[str, tuple[str, str]]:
    """Verdict and reason of every body."""
    planets = stages.assess(make_batch(solar_system()), Settings.read(None, {"xuv.scatter_dex": scatter})).planets
    columns = (planets[name] for name in ("planet_id", "verdict", "verdict_reason"))
    return {body: (verdict, reason) for body, verdict, reason in zip(*columns, strict=True)}


def verdict(body: str, scatter: float) -> str:
    return assessed(scatter)[body][0]


def reason(body: str) -> str:
    return assessed(0.2)[body][1]


CHECKS = [
    *(
        Check(
            f"{body.capitalize()} is judged as it is, {scatter:g} dex of XUV scatter",
            source,
            right,
            partial(verdict, body, scatter),
        )
        for scatter in SCATTERS
        for body, (right, source) in KNOWN.items()
    ),
    *(
        Check(f"{body.capitalize()} is bare of uncondensed air by frost", FROST, words("frozen"), partial(reason, body))
        for body in ("triton", "pluto")
    ),
]
