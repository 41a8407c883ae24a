"""The worked sheet for a person: plain text at 80 columns, or Markdown; and for a program: JSON."""

from __future__ import annotations

import json
import textwrap
from dataclasses import asdict

from keptair.errors import visible
from keptair.worksheet.sheet import Section, Sheet, Step

WIDTH = 80
INDENT = "        "


def as_text(sheet: Sheet) -> str:
    """Plain text: central value, then the 16th, 50th and 84th percentile of the draws, then formula and source."""
    lines = [visible(sheet.planet), f"in {visible(sheet.run)}", ""]
    lines += textwrap.wrap(
        "Central value (values as catalogued, every draw at its median), and in brackets the 16th, 50th and 84th "
        "percentile of the draws.",
        WIDTH,
    )
    lines += [f"Note: {remark}" for remark in sheet.remarks]
    said: set[str] = set()
    for section in sheet.sections:
        lines += ["", section.title, "-" * len(section.title)]
        lines += _table(section)
        for step in section.steps:
            lines += _step(step, said)
    return "\n".join(lines) + "\n"


def as_markdown(sheet: Sheet) -> str:
    """The same as Markdown, a table for each section."""
    lines = [f"# {_cell(visible(sheet.planet))}", "", f"In `{visible(sheet.run)}`.", ""]
    lines += [f"> {remark}" for remark in sheet.remarks]
    for section in sheet.sections:
        lines += ["", f"## {section.title}", ""]
        if section.rows:
            lines += ["| " + " | ".join(section.heads) + " |", "|" + "---|" * len(section.heads)]
            lines += ["| " + " | ".join(_cell(_number(value)) for value in row) + " |" for row in section.rows]
            lines.append("")
        lines += ["| | step | value | unit | 16 % | 50 % | 84 % | formula | from |", "|" + "---|" * 9]
        for step in section.steps:
            spread = [_number(value) for value in step.percentiles or ("", "", "")]
            cells = [step.symbol, step.name, _number(step.value), step.unit, *spread, step.formula]
            lines.append("| " + " | ".join(_cell(cell) for cell in (*cells, step.origin or step.source)) + " |")
    return "\n".join(lines) + "\n"


def as_json(sheet: Sheet) -> str:
    """The sheet as it is; numbers that are missing are null."""
    return json.dumps(asdict(sheet), indent=2, ensure_ascii=False)


def _step(step: Step, said: set[str]) -> list[str]:
    """A line for the value; formula and source under it, the first time they come."""
    name = f"{step.symbol:7} {step.name}" if step.symbol else step.name
    value = "" if step.value is None and not step.percentiles else _number(step.value)
    spread = ""
    if step.percentiles and len(set(step.percentiles)) > 1:
        spread = "[" + ", ".join(_number(one) for one in step.percentiles) + "]"
    head = f"{name:40} {value:>10} {step.unit}".rstrip()
    if len(head) > WIDTH:
        lines = [name, *_wrapped(value)]
    elif spread and len(head) + len(spread) < WIDTH:
        lines = [f"{head} {spread:>{WIDTH - 1 - len(head)}}"]
    else:
        lines = [head, *_wrapped(spread)]
    for text in (step.origin, step.formula, step.source):
        if text and (text == step.origin or text not in said):
            said.add(text)
            lines += _wrapped(text)
    return lines


def _wrapped(text: str) -> list[str]:
    return textwrap.wrap(text, WIDTH, initial_indent=INDENT, subsequent_indent=INDENT)


def _table(section: Section) -> list[str]:
    if not section.rows:
        return []
    rows = [section.heads, *([_number(value) for value in row] for row in section.rows)]
    widths = [max(len(row[place]) for row in rows) for place in range(len(section.heads))]
    return [" ".join(f"{cell:>{width}}" for cell, width in zip(row, widths, strict=True)) for row in rows]


def _number(value: float | str | None) -> str:
    if value is None:
        return "-"
    if isinstance(value, str):
        return value
    return "<1e-99" if 0 < abs(value) < 1e-99 else f"{value:.4g}"


def _cell(text: str) -> str:
    return text.replace("|", "\\|").replace("\n", " ")
