"""Random column maps: right ones, wrong ones, and TOML that is none."""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from random import Random
from typing import Any

from fuzz import words
from fuzz.case import ColumnMapText

REFERENCE_KEYS = ("plus", "minus", "bound", "upper", "lower", "kind")
WRONG: tuple[Callable[[], Any], ...] = (
    lambda: None, lambda: True, lambda: -1, lambda: 10**30, lambda: math.nan, lambda: math.inf, lambda: 1e308, list,
    dict, lambda: [[]], lambda: {"a": {"b": {}}}, lambda: "", lambda: ["", 0, True, math.nan], lambda: "x" * 5000,
    lambda: [f"column {number}" for number in range(300)], lambda: {f"key {number}": number for number in range(300)},
    lambda: "\x1b[31m\u202e", lambda: 0, lambda: [1, 2, 3],
)  # fmt: skip


def column_map(random: Random, names: list[str]) -> ColumnMapText:
    """No map, a dictionary, or TOML; `names` are the columns of the file it is for."""
    if random.random() < 0.4:
        return None
    made = _dictionary(random, names)
    if random.random() < 0.12:
        made = _spoilt(random, made)
    if isinstance(made, dict) and random.random() < 0.5:
        return made
    text = as_toml(made)
    return _damaged(random, text) if random.random() < 0.12 else text


def changed(random: Random, old: ColumnMapText, names: list[str]) -> ColumnMapText:
    """A map a little different from an old one."""
    if isinstance(old, dict) and random.random() < 0.5:
        spoilt = _spoilt(random, json.loads(json.dumps(old)))
        return spoilt if isinstance(spoilt, dict) else None
    if isinstance(old, str) and old and random.random() < 0.3:
        return _damaged(random, old)
    return column_map(random, names)


def as_toml(made: Any) -> str:
    """The dictionary as TOML, as far as TOML can say it."""
    if not isinstance(made, dict):
        return str(made)
    lines: list[str] = []
    for table, entries in made.items():
        if not isinstance(entries, dict):
            lines.insert(0, f"{_key(table)} = {_value(entries)}")
            continue
        plain = {key: value for key, value in entries.items() if not isinstance(value, dict)}
        lines += [f"[{_key(table)}]", *(f"{_key(key)} = {_value(value)}" for key, value in plain.items())]
        for key, value in entries.items():
            if isinstance(value, dict):
                lines += [f"[{_key(table)}.{_key(key)}]", *(f"{_key(k)} = {_value(v)}" for k, v in value.items())]
    return "\n".join(lines) + "\n"


def _key(key: object) -> str:
    return _text(str(key))


def _value(value: Any) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(f"{_key(key)} = {_value(inner)}" for key, inner in value.items()) + "}"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(map(_value, value)) + "]"
    if isinstance(value, float) and not math.isfinite(value):
        return str(value)
    return _text(value or "") if isinstance(value, str | None) else json.dumps(value)


def _text(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _dictionary(random: Random, names: list[str]) -> dict[str, Any]:
    made: dict[str, Any] = {"columns": {}}
    if random.random() < 0.9:
        made["columns"]["planet_id"] = {"from": "planet_id" if random.random() < 0.6 else _reference(random, names)}
    for _ in range(random.choice((0, 1, 1, 2, 3, 5))):
        name = random.choice(words.INPUTS) if random.random() < 0.95 else words.header(random)
        made["columns"][name] = _entry(random, name, names)
    if random.random() < 0.3:
        made["constants"] = {random.choice(words.INPUTS): _constant(random) for _ in range(random.randrange(1, 4))}
    if random.random() < 0.3:
        made["file"] = _file(random, names)
    if random.random() < 0.3:
        side = random.choice(("keep", "drop"))
        made["rows"] = {side: {random.choice(names): [_word(random) for _ in range(random.randrange(4))]}}
    return made


def _entry(random: Random, name: str, names: list[str]) -> dict[str, Any]:
    entry: dict[str, Any] = {"from": _reference(random, names)}
    if random.random() < 0.3:
        entry["from"] = [_reference(random, names) for _ in range(random.randrange(4))]
    if random.random() < 0.2:
        entry["unit"] = random.choice(words.UNITS)
    if random.random() < 0.3:
        entry["missing"] = [_word(random) for _ in range(random.randrange(4))]
    for key in REFERENCE_KEYS:
        if random.random() < 0.2 and (name in words.NUMBERS or random.random() < 0.03):
            entry[key] = _reference(random, names)
    if random.random() < (0.2 if name not in words.NUMBERS or "kind" in entry else 0.02):
        entry["kinds" if "kind" in entry else "words"] = {
            str(_word(random)): random.choice(("measured", "minimum", "relation", "yes", "no", "", words.cell(random)))
            for _ in range(random.randrange(4))
        }
    if random.random() < 0.1:
        entry["without_error"] = random.choice(("measured", "relation", "x"))
    if name == "updated" or random.random() < 0.01:
        entry["date"] = random.choice(words.PATTERNS)
    return entry


def _file(random: Random, names: list[str]) -> dict[str, Any]:
    made: dict[str, Any] = {}
    if random.random() < 0.5:
        made["comment"] = random.choice(("#", "", "%", "\\", "p", "planet_id", '"', "\n", "#" * 3000, "é", "|", " "))
    if random.random() < 0.5:
        made["carry"] = random.choice((["*"], "*", [random.choice(names)], [_reference(random, names)], []))
    if random.random() < 0.5:
        made["missing"] = [words.cell(random) for _ in range(random.randrange(4))]
    return made


def _reference(random: Random, names: list[str]) -> Any:
    kind = random.random()
    if kind < 0.7:
        return random.choice(names)
    if kind < 0.92:
        return random.randrange(1, len(names) + 1)
    return random.randrange(-2, len(names) + 2) if kind < 0.96 else words.header(random)


def _word(random: Random) -> Any:
    return random.choice(
        (words.cell(random), words.cell(random), "*", "K*a?", -1, 0, 1, 1.0, True, False, 1e308, 10**400)
    )


def _constant(random: Random) -> Any:
    return random.choice(
        (0.3, 1, "measured", "co2", "2024-01-01", True, math.nan, -5, 1e300, 10**400, words.cell(random))
    )


def _spoilt(random: Random, made: Any) -> Any:
    """One value somewhere in it replaced by something that does not belong there, or a key added or renamed."""
    if not isinstance(made, dict) or not made or random.random() < 0.2:
        return random.choice(WRONG)()
    key = random.choice(list(made))
    if random.random() < 0.15:
        made[words.cell(random)] = made.pop(key)
    else:
        made[key] = _spoilt(random, made[key])
    return made


def _damaged(random: Random, text: str) -> str:
    for _ in range(random.randrange(1, 4)):
        start = random.randrange(len(text) + 1)
        end = start + random.choice((0, 0, 1, 2, 30))
        text = text[:start] + random.choice(("", words.cell(random), "[", "]", '"""', "=", "{", "\n", ".")) + text[end:]
    return text
