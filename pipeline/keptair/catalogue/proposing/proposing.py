"""From a catalogue nobody has described to a column map somebody can check."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import numpy as np

from keptair.catalogue import fetching
from keptair.catalogue.proposing import choosing, identifiers, texts
from keptair.catalogue.proposing.candidates import Candidate, candidates, meaning
from keptair.catalogue.proposing.companions import companions, is_companion
from keptair.catalogue.proposing.hints import hints
from keptair.catalogue.proposing.model import Guess, Proposal, Question
from keptair.catalogue.proposing.naming import read_description, read_names
from keptair.catalogue.proposing.sampling import Column, Sample, sample
from keptair.catalogue.proposing.writing import toml
from keptair.catalogue.showing import quoted
from keptair.tables import schema


def propose(source: str | Path) -> Proposal:
    """Look at a catalogue's header and its first rows, and propose which column is which canonical input."""
    with _lying_here(str(source)) as path, np.errstate(all="ignore"):  # whatever numbers the file holds
        return _Proposer(sample(path), path.name).proposal()


class _Proposer:
    """One catalogue looked at: what is guessed, what stays open, which columns are used."""

    def __init__(self, seen: Sample, name: str) -> None:
        self.name = name
        self.seen = seen
        self.columns = seen.columns
        self.readings = read_names([column.name for column in self.columns])
        self.descriptions = [read_description(column.about.description) for column in self.columns]
        self.companions = companions(self.columns, self.readings, self.descriptions)
        own = schema.catalogue().names
        self.free = [
            position
            for position, column in enumerate(self.columns)
            if column.name in own or not is_companion(column, self.companions)
        ]
        self.guesses: dict[str, Guess] = {}
        self.questions: list[Question] = []
        self.used: set[int] = set()

    def proposal(self) -> Proposal:
        columns = [(self.columns[place], self.readings[place], self.descriptions[place]) for place in self.free]
        names = identifiers.columns_of_names(
            [column for column, _, _ in columns], [(name, about) for _, name, about in columns]
        )
        planet = self._take(identifiers.guess_planet(names))
        self._take(identifiers.guess_host(names, planet))
        for find in (texts.guess_transits, texts.guess_updated, texts.guess_background):
            self._take(find([read for read in columns if read[0].position not in self.used]))
        self._take_numbers()
        for guess, column in texts.own_kinds(self.columns):
            number = self.guesses.get(guess.name.replace("kind", "rearth" if "radius" in guess.name else "mearth"))
            if number is None or "kind" not in number.entry:
                self._take((guess, None, [column]))
        inputs = [column.name for column in schema.inputs()]
        guesses = [self.guesses[name] for name in inputs if name in self.guesses]
        questions = [question for question in self.questions if question.name not in self.guesses]
        asked = {question.name for question in questions}
        written = toml(
            self._about(),
            guesses,
            questions,
            hints([(column, name) for column, name, _ in columns], planet),
            [name for name in inputs if name not in self.guesses and name not in asked and "_kind" not in name],
            [column.name for column in self.columns if column.position not in self.used],
        )
        return Proposal(written, tuple(guesses), tuple(questions))

    def _take(self, found: texts.Found) -> list[Column]:
        guess, question, columns = found
        if question:
            self.questions.append(question)
        if guess and guess.name not in self.guesses:
            self.guesses[guess.name] = guess
            self.used |= {column.position for column in columns}
        return columns

    def _take_numbers(self) -> None:
        chosen, questions = choosing.choose(self._candidates(), self.companions)
        words = [self.columns[place] for place in self.free if not self.columns[place].is_numeric]
        transiting = texts.transiting(self.guesses.get("transits"), self.columns)
        made, more, used = choosing.guesses(chosen, self.companions, words, transiting)
        self.questions += [*questions, *more]
        self.used |= used
        for guess in made:
            self.guesses.setdefault(guess.name, guess)

    def _candidates(self) -> list[Candidate]:
        found = []
        for place in self.free:
            column = self.columns[place]
            what = meaning(column, self.readings[place], self.descriptions[place])
            if what is not None and column.position not in self.used:
                found.append((column, what))
        said: dict[str, set[str]] = {}
        for _, what in found:
            if what.subject in ("planet", "star"):
                said.setdefault(what.quantity, set()).add(what.subject)
        return [
            candidate
            for column, what in found
            for candidate in candidates(column, what, said.get(what.quantity, set()))
        ]

    def _about(self) -> str:
        rows = "all" if self.seen.whole else "the first"
        return (
            f"Column map proposed for {quoted(self.name)} ({self.seen.format}, {len(self.columns)} columns; {rows} "
            f"{self.seen.rows} rows were looked at). high, fair and low say how sure each guess is: read, correct, use."
        )


@contextmanager
def _lying_here(source: str) -> Iterator[Path]:
    """The file, fetched first if it lies elsewhere."""
    if not fetching.is_elsewhere(source):
        yield Path(source)
        return
    with fetching.temporary_folder() as folder:
        yield fetching.fetch(source, folder)
        shutil.rmtree(folder, ignore_errors=True)
