"""The handbook's table of contents: every subject and its checks."""

from __future__ import annotations

from handbook import exobases, gases, laws, losses, relations, starlight, verdicts, worlds
from handbook.check import Check

SUBJECTS: dict[str, list[Check]] = {
    "Constants, probability and radiation": laws.CHECKS,
    "Bulk and orbits": worlds.CHECKS,
    "Light": starlight.CHECKS,
    "Gases": gases.CHECKS,
    "Exobases": exobases.CHECKS,
    "Losses": losses.CHECKS,
    "Relations, shoreline and metrics": relations.CHECKS,
    "Verdicts on the Solar System": verdicts.CHECKS,
}
