"""Proposing a column map for a catalogue nobody has described yet."""

from __future__ import annotations

from keptair.catalogue.proposing.model import Guess, Proposal, Question
from keptair.catalogue.proposing.proposing import propose

__all__ = ["Guess", "Proposal", "Question", "propose"]
