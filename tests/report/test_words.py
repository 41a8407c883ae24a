"""Every word a table can hold has its meaning in the report."""

from __future__ import annotations

import pytest

from keptair.report import words
from keptair.tables import schema


@pytest.mark.parametrize(
    ("table", "column", "meanings"),
    [
        ("planets", "verdict", words.VERDICTS),
        ("planets", "verdict", words.VERDICT_PHRASES),
        ("planets", "verdict_reason", words.REASONS),
        ("planets", "verdict_reason", words.BRIEF_REASONS),
        ("planets", "planet_radius_rearth_source", words.SOURCES),
        ("planets", "planet_radius_rearth_source", words.BRIEF_SOURCES),
        ("changes", "change", words.CHANGES),
        ("rejects", "rule", words.RULES),
    ],
)
def test_no_word_of_the_schema_is_without_a_meaning(
    table: schema.TableName, column: str, meanings: dict[str, object]
) -> None:
    assert set(meanings) == set(schema.table(table)[column].enum)


def test_every_measured_input_has_a_name_in_the_words_of_the_trade() -> None:
    assert set(words.INPUTS) == set(schema.measured_inputs())


@pytest.mark.parametrize(
    ("number", "text"),
    [
        (None, "–"),
        (float("nan"), "–"),
        (0.0, "0"),
        (0.99999, "1.00"),
        (9.996, "10.0"),
        (123456.0, "123\u202f000"),
        (2.5e7, "2.50\u2009×\u200910⁷"),
        (-3e-6, "−3.00\u2009×\u200910⁻⁶"),
    ],
)
def test_numbers_are_rounded_and_never_pretend_to_digits(number: float | None, text: str) -> None:
    assert words.significant(number) == text


@pytest.mark.parametrize(
    ("number", "text"), [(0.0, "0"), (0.004, "< 0.01"), (0.5, "0.50"), (0.996, "> 0.99"), (1.0, "1")]
)
def test_a_probability_is_0_or_1_only_where_every_draw_says_so(number: float, text: str) -> None:
    assert words.probability(number) == text


@pytest.mark.parametrize(
    ("part", "whole", "text"), [(0, 0, "–"), (0, 9, "0 %"), (9, 9, "100 %"), (1, 999, "< 1 %"), (1, 3, "33 %")]
)
def test_a_share_is_0_or_100_percent_only_where_it_is_exactly_so(part: int, whole: int, text: str) -> None:
    assert words.share(part, whole).replace(words.THIN_SPACE, " ") == text


def test_text_that_could_steer_a_terminal_or_turn_a_line_around_is_made_visible() -> None:
    assert words.visible("a\x1b[31m\u202eb\u2028c\nd") == "a\ufffd[31m\ufffdb\ufffdc\ufffdd"
    assert words.visible("GJ 1214 b – Ñandú 星") == "GJ 1214 b – Ñandú 星"
