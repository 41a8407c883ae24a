"""Rows for tests written in few words: batches by hand and bodies of the Solar System."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from keptair.batch import Batch
from keptair.physics.constants import EARTH_MASS, EARTH_RADIUS, GRAVITATION
from keptair.records import from_records
from keptair.reference import read_toml
from keptair.tables import schema

ERRORS = ("_err_plus", "_err_minus")


def make_batch(rows: Sequence[Mapping[str, Any]]) -> Batch:
    """A screened batch of rows of canonical names and values.

    `<name>_err` stands for both errors, planets without a planet_id are numbered, what a row leaves out is missing,
    and a name no table knows is a mistake of the test.
    """
    return from_records([_spelled_out({"planet_id": f"planet {place}", **row}) for place, row in enumerate(rows, 1)])


def solar_system(*names: str, background: str = "") -> list[dict[str, Any]]:
    """Rows of bodies of the Solar System by their keys in solar_system.toml, all of them where none is named."""
    reference = read_toml("solar_system")
    star = {name: value for name, value in reference["star"].items() if name != "source"}
    bodies = reference["bodies"]
    return [_body(name, bodies[name], star | {"background": background}) for name in names or bodies]


def _body(name: str, body: Mapping[str, Any], others: Mapping[str, Any]) -> dict[str, Any]:
    return {
        **others,
        "planet_id": name,
        "host_id": "sun",
        "planet_mass_mearth": body["gm_m3_s2"] / GRAVITATION / EARTH_MASS,
        "planet_radius_rearth": body["radius_m"] / EARTH_RADIUS,
        "semi_major_axis_au": body["semi_major_axis_au"],
        "eccentricity": body["eccentricity"],
        "bond_albedo": body["bond_albedo"],
    }


def _spelled_out(row: Mapping[str, Any]) -> dict[str, Any]:
    plain: dict[str, Any] = {}
    for name, value in row.items():
        plain |= (
            {name + side.removeprefix("_err"): value for side in ERRORS} if name.endswith("_err") else {name: value}
        )
    unknown = plain.keys() - set(schema.catalogue().names) - {f"given.{name}" for name in schema.measured_inputs()}
    if unknown:
        raise KeyError(f"no such input: {', '.join(sorted(unknown))}")
    return plain
