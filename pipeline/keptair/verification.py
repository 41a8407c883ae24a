"""The Solar System through any settings: expected against obtained."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError

from keptair import toml_files
from keptair.errors import SettingsError, counted
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS, GRAVITATION
from keptair.records import from_records
from keptair.reference import read_toml
from keptair.reference.models import Entry, Positive, Source
from keptair.settings import Settings, flat_names
from keptair.stages import assess

Verdict = Literal["envelope", "secondary", "bare", "undecided", "unassessed"]


class Body(Entry):
    """A body whose air is known."""

    title: Annotated[str, Field(min_length=1, max_length=128)]
    gm_m3_s2: Positive
    radius_m: Positive
    semi_major_axis_au: Positive
    eccentricity: Annotated[float, Field(ge=0, lt=1)] = 0.0
    bond_albedo: Annotated[float, Field(ge=0, lt=1)]
    albedo_source: Source
    background: str = ""
    expected: Annotated[tuple[Verdict, ...], Field(min_length=1)]

    def record(self, star: Mapping[str, Any]) -> dict[str, Any]:
        """The body as a row of a catalogue."""
        return {
            **{name: value for name, value in star.items() if name != "source"},
            "planet_id": self.title,
            "host_id": "Sun",
            "planet_mass_mearth": self.gm_m3_s2 / (GRAVITATION * EARTH_MASS),
            "planet_radius_rearth": self.radius_m / EARTH_RADIUS,
            "semi_major_axis_au": self.semi_major_axis_au,
            "eccentricity": self.eccentricity,
            "bond_albedo": self.bond_albedo,
            "background": self.background,
        }


@dataclass(frozen=True)
class Outcome:
    """One body: what was expected, what came out."""

    body: str
    expected: tuple[str, ...]
    obtained: str
    reason: str
    background: str
    secondary_probability: float
    envelope_probability: float

    @property
    def passed(self) -> bool:
        return self.obtained in self.expected

    def as_dict(self) -> dict[str, Any]:
        """Ready for JSON."""
        return {**asdict(self), "passed": self.passed}


def verify(settings: Settings, bodies_file: Path | None = None) -> list[Outcome]:
    """Every body of the reference data, and those of a user's file, through these settings."""
    reference = read_toml("solar_system")
    bodies = _bodies(reference["bodies"], "solar_system.toml")
    if bodies_file is not None:
        found, _ = toml_files.read(bodies_file, SettingsError)
        bodies |= _bodies(found.get("bodies", {}), str(bodies_file))
    unknown = sorted({body.background for body in bodies.values()} - {"", *settings.backgrounds})
    if unknown:
        raise SettingsError(f"bodies name backgrounds the settings do not know: {', '.join(unknown)}")
    settings = with_solar_activity(settings, reference["settings"])
    records = [body.record(reference["star"]) for body in bodies.values()]
    planets = assess(from_records(records), settings).planets
    return [
        Outcome(
            body.title,
            body.expected,
            str(planets["verdict"][place]),
            str(planets["verdict_reason"][place]),
            str(planets["background"][place]),
            float(planets["secondary_probability"][place]),
            float(planets["envelope_probability"][place]),
        )
        for place, body in enumerate(bodies.values())
    ]


def with_solar_activity(settings: Settings, overrides: Mapping[str, Any]) -> Settings:
    """The reference data's settings for the Sun, except where the user set the same."""
    values = settings.model_dump()
    for name in flat_names(overrides):
        *groups, last = name.split(".")
        place, given, model = values, overrides, settings
        for group in groups:
            place, given, model = place[group], given[group], getattr(model, group)
        if last not in model.model_fields_set:
            place[last] = given[last]
    return Settings.model_validate(values)


def _bodies(entries: Mapping[str, Any], where: str) -> dict[str, Body]:
    bodies, problems = {}, []
    for key, entry in entries.items():
        try:
            bodies[key] = Body.model_validate(entry)
        except ValidationError as error:
            problems += [
                f"[bodies.{key}] {'.'.join(map(str, one['loc']))}: {one['msg'].lower()}" for one in error.errors()
            ]
    if problems:
        raise SettingsError(f"{where}: bodies that cannot be used ({counted(len(problems), 'problem')})", problems)
    return bodies
