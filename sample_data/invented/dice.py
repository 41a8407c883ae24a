"""The dice: every random choice of the invented survey, and its names."""

import math
from collections.abc import Iterator, Sequence
from statistics import NormalDist

import numpy as np


class Dice:
    """Uniform numbers and what is made of them; numpy promises the raw sequence of PCG64 for all versions to come."""

    def __init__(self, seed: int) -> None:
        self.bits = np.random.PCG64(seed)

    def between(self, low: float, high: float) -> float:
        return low + (high - low) * (int(self.bits.random_raw()) >> 11) * 2.0**-53

    def scale(self, low: float, high: float) -> float:
        return math.exp(self.between(math.log(low), math.log(high)))

    def normal(self, spread: float) -> float:
        return spread * NormalDist().inv_cdf(self.between(0.02, 0.98))

    def chance(self, share: float) -> bool:
        return self.between(0, 1) < share

    def pick(self, choices: Sequence[str]) -> str:
        return choices[int(self.between(0, len(choices)))]


def invented_names(dice: Dice) -> Iterator[str]:
    """Names one can say aloud, each once."""
    taken = set()
    while True:
        start = dice.pick(("Br", "Dr", "F", "Fl", "L", "M", "N", "Pr", "K", "S", "Sk", "Th", "V", "Z"))
        middle = dice.pick(("l", "m", "nd", "r", "rv", "ss", "v", "lm", "nn", "rl"))
        ending = dice.pick(("ath", "el", "en", "eth", "iel", "in", "ora", "une", "ow", "yss"))
        name = start + dice.pick("aeiou") + middle + dice.pick("aeiou") + dice.pick("lmnrv") + ending
        if name not in taken:
            taken.add(name)
            yield name
