"""Of all columns that may be a canonical number the one that most likely is, with all that stands beside it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from keptair.catalogue.columns import KINDS
from keptair.catalogue.proposing.beside import Beside, beside, precision
from keptair.catalogue.proposing.candidates import Candidate
from keptair.catalogue.proposing.companions import Companion
from keptair.catalogue.proposing.kinds import bare_relation, kinds_of
from keptair.catalogue.proposing.laws import confirmed_by_kepler, is_same, settled_by_density
from keptair.catalogue.proposing.model import Confidence, Guess, Question, confidence
from keptair.catalogue.proposing.sampling import Column
from keptair.catalogue.showing import quoted
from keptair.tables import schema

ENOUGH = 0.9  # of the fullest rival's rows: as good as full
MOST_RIVALS = 4  # named in a reason
MOST_STRANGE = 5  # words of a column of numbers that are proposed as missing


@dataclass
class Chosen:
    """The column taken for a canonical number, and what was found beside it."""

    candidate: Candidate
    beside: Beside
    rivals: list[tuple[Candidate, str]] = field(default_factory=list)  # and why they were not taken
    contested: bool = False  # by others as good


def choose(
    possible: Iterable[Candidate], companions: dict[int, list[Companion]]
) -> tuple[dict[str, Chosen], list[Question]]:
    """One column for each number, a column for one number only; what stays open as questions."""
    by_input: dict[str, list[Candidate]] = {}
    questions: list[Question] = []
    for candidate in possible:
        if candidate.unit.wrong:
            text = f"{quoted(candidate.column.name)} has the name, but {candidate.unit.wrong}"
            questions.append(Question(candidate.input.name, text))
        else:
            by_input.setdefault(candidate.input.name, []).append(candidate)
    chosen: dict[str, Chosen] = {}
    for name, several in by_input.items():
        found = {candidate.column.position: _beside(candidate, companions) for candidate in several}
        chosen[name] = _best(several, found)
    _settle_by_laws(chosen)
    for name, taken in list(chosen.items()):
        if taken.contested:
            taken.candidate.doubts.append("other columns say the same")
        if taken.candidate.unit.possible:
            questions.append(Question(name, _open_unit(taken.candidate)))
            del chosen[name]
    return chosen, questions


def guesses(
    chosen: dict[str, Chosen],
    companions: dict[int, list[Companion]],
    texts: Sequence[Column],
    transiting: NDArray[np.bool_] | None,
) -> tuple[list[Guess], list[Question], set[int]]:
    """The guesses, those too doubtful as questions, and the positions of all columns used."""
    made: list[Guess] = []
    questions: list[Question] = []
    used: set[int] = set()
    for name, taken in chosen.items():
        candidate = taken.candidate
        sure = confidence(len(candidate.doubts))
        if sure is None:
            questions.append(
                Question(name, f"{quoted(candidate.column.name)} may be it; {'; '.join(candidate.doubts)}")
            )
            continue
        constant = _kinds(taken, companions.get(candidate.column.position, ()), texts, transiting)
        made.append(_guess(taken, sure))
        made += [constant] if constant else []
        used |= {candidate.column.position, *(column.position for column in taken.beside.used)}
    return made, questions, used


def _beside(candidate: Candidate, companions: dict[int, list[Companion]]) -> Beside:
    return beside(candidate, companions.get(candidate.column.position, ()))


def _best(several: list[Candidate], found: dict[int, Beside]) -> Chosen:
    """Fewest doubts, then the fullest, errors, the canonical unit among equal measurements, the smallest errors."""
    fullest = max(candidate.count for candidate in several)

    def order(candidate: Candidate) -> tuple[Any, ...]:
        stands = found[candidate.column.position]
        return (
            candidate.column.name != candidate.input.name,
            candidate.minimum,
            len(candidate.doubts) + bool(candidate.unit.possible),
            candidate.count < ENOUGH * fullest,
            -candidate.count if candidate.count < ENOUGH * fullest else 0,
            not stands.errors,
        )

    first = min(several, key=order)
    equals = [candidate for candidate in several if order(candidate) == order(first)]
    best = min(
        equals,
        key=lambda one: (
            _rank_of_unit(one) if is_same(one, first) else 0,
            round(precision(one, found[one.column.position].errors), 4),
            one.column.position,
        ),
    )
    others = [other for other in several if other is not best]
    contested = any(order(other)[:3] == order(best)[:3] and not is_same(best, other) for other in others)
    return Chosen(best, found[best.column.position], [(other, _why(best, other, found)) for other in others], contested)


def _why(best: Candidate, other: Candidate, found: dict[int, Beside]) -> str:
    """Why the best was taken rather than another."""
    errors, others = found[best.column.position].errors, found[other.column.position].errors
    if is_same(best, other):
        return f"the same in {other.unit.unit}" if other.unit.unit != best.unit.unit else "the same"
    if other.minimum and not best.minimum:
        return "M sin i"
    if len(other.doubts) > len(best.doubts):
        return other.doubts[0]
    if other.count < ENOUGH * best.count:
        return f"only {other.count} values"
    if errors and not others:
        return "without errors"
    return "with larger errors" if precision(best, errors) < precision(other, others) else "as good, but further on"


def _rank_of_unit(candidate: Candidate) -> int:
    """How far a unit is from the canonical one: 0 for that itself."""
    unit = candidate.unit.conversion
    return 0 if unit.factor == 1.0 and not unit.logarithmic and not candidate.unit.possible else 1


def _settle_by_laws(chosen: dict[str, Chosen]) -> None:
    radius, mass = (chosen.get(name) for name in ("planet_radius_rearth", "planet_mass_mearth"))
    if radius and mass:
        settled_by_density(radius.candidate, mass.candidate)
    period, axis = (chosen.get(name) for name in ("orbital_period_d", "semi_major_axis_au"))
    if not (period and axis):
        return
    star = chosen.get("stellar_mass_msun")
    if confirmed_by_kepler(period.candidate, axis.candidate, star.candidate if star else None):
        for taken, other in ((period, axis), (axis, period)):
            taken.candidate.because.append(f"Kepler's third law holds with {quoted(other.candidate.column.name)}")
            del taken.candidate.doubts[:1]


def _open_unit(candidate: Candidate) -> str:
    units = " or ".join(candidate.unit.possible)
    return f"{quoted(candidate.column.name)} ({candidate.unit.because}) may be in {units}; say which"


def _kinds(
    taken: Chosen, companions: Sequence[Companion], texts: Sequence[Column], transiting: NDArray[np.bool_] | None
) -> Guess | None:
    """What a planet's radius or mass is; a guess of its own where all masses are M sin i."""
    candidate, found = taken.candidate, taken.beside
    if candidate.input.name not in KINDS or candidate.column.name == candidate.input.name:
        return None
    if not candidate.minimum:
        _minimum_beside(taken)
    column = kinds_of(candidate, companions, texts, found)
    if column is not None:
        found.used.append(column)
        return None
    if candidate.input.quantity == "radius":
        evidence = bare_relation(candidate, found.errors, transiting)
        if evidence.endswith("transit"):
            found.entry["without_error"] = "relation"
        found.remarks += [evidence] if evidence else []
    elif candidate.minimum:
        kind = KINDS[candidate.input.name][0]
        return Guess(kind, (), "fair", f"{quoted(candidate.column.name)} is M sin i in every row", constant="minimum")
    return None


def _minimum_beside(taken: Chosen) -> None:
    """M sin i in a column of its own: the mass is at least that."""
    for other, _ in taken.rivals:
        same_unit = other.unit.unit == taken.candidate.unit.unit
        fills = np.isfinite(other.values) & ~np.isfinite(taken.candidate.values)
        if other.minimum and fills.any() and same_unit and not other.unit.possible:
            taken.beside.take("lower", other.column)
            taken.beside.remarks.append(
                f"where there is no mass, {quoted(other.column.name)} (M sin i) is the least it is"
            )


def _guess(taken: Chosen, sure: Confidence) -> Guess:
    candidate, found = taken.candidate, taken.beside
    reason = "; ".join([*candidate.because, *(f"but {doubt}" for doubt in candidate.doubts)])
    if taken.rivals:
        reason += f"; rather than {_named(taken.rivals)}"
    missing: list[int | float | str] = [*candidate.marks]
    if candidate.column.is_numeric:
        missing += [word for word, count in candidate.column.strange.most_common(MOST_STRANGE) if count > 1]
    entry = {"missing": missing, **found.entry} if missing else found.entry
    unit = candidate.unit.unit or schema.catalogue()[candidate.input.name].unit
    sources = (candidate.column.reference,)
    return Guess(candidate.input.name, sources, sure, reason, unit, entry, tuple(found.remarks))


def _named(rivals: list[tuple[Candidate, str]]) -> str:
    names = [f"{quoted(other.column.name)} ({why})" for other, why in rivals[:MOST_RIVALS]]
    more = len(rivals) - MOST_RIVALS
    return ", ".join(names) + (f" and {more} more" if more > 0 else "")
