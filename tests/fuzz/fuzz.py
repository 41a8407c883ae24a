"""The fuzzer: tries case after case, counts what becomes of them, and keeps the unclean ones."""

from __future__ import annotations

import hashlib
import json
import os
import re
import time
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from random import Random

from fuzz import checks, mutating
from fuzz.case import Case

SEEDS = 400  # cases to begin with
POOL = 3000  # cases changed further
KEPT = 3  # of each kind of unclean end
SEEDED = 0.2  # share of cases made afresh


class Bench:
    """Where cases are tried: counts, a log line each minute, a folder of unclean cases, an end in time."""

    def __init__(self, folder: Path, log: Path, until: float) -> None:
        self.folder, self.log, self.until = folder, log, until
        self.state = folder / "state.json"
        self.scratch = folder / "scratch"
        self.scratch.mkdir(parents=True, exist_ok=True)
        found = json.loads(self.state.read_text(encoding="utf-8")) if self.state.exists() else {}
        self.counts = Counter(found.get("counts", {}))
        self.kinds = Counter(found.get("kinds", {}))
        self._next_line = time.monotonic() + 60

    def attempt(self, case: Case) -> checks.Outcome:
        """Try a case; at the end of the time this process ends."""
        if time.time() >= self.until:
            self.save()
            os._exit(0)
        (self.folder / "current.case").write_bytes(case.as_bytes())  # for whoever finds this process dead
        outcome = checks.attempt(case, self.scratch)
        self.counts["tried"] += 1
        self.counts[outcome.word] += 1
        for wrong in outcome.unclean:
            self.keep(case, wrong)
        if time.monotonic() >= self._next_line:
            self._next_line += 60
            self.save()
            self.write(self.summary())
        return outcome

    def keep(self, case: Case, wrong: str) -> None:
        """Note an unclean end, with a few cases that lead to it."""
        kind = shape(wrong)
        self.kinds[kind] += 1
        if self.kinds[kind] <= KEPT:
            name = f"{hashlib.sha256(kind.encode()).hexdigest()[:8]}-{self.kinds[kind]}.case"
            (self.folder / name).write_bytes(case.as_bytes())
            self.write(f"UNCLEAN {name}: {wrong!r}")
            self.save()

    def save(self) -> None:
        self.state.write_text(json.dumps({"counts": self.counts, "kinds": self.kinds}), encoding="utf-8")

    def write(self, line: str) -> None:
        with self.log.open("a", encoding="utf-8") as log:
            log.write(f"{time.strftime('%H:%M:%S')} {line}\n")

    def summary(self) -> str:
        counts = [f"{self.counts[word]} {word}" for word in ("accepted", "refused", "unclean")]
        return f"{self.counts['tried']} inputs tried: {', '.join(counts)} ({len(self.kinds)} kinds of unclean end)"


def shape(text: str) -> str:
    """A message without what differs from case to case."""
    return re.sub(r"\d+", "0", re.sub(r"\".*?\"|'.*?'|\(.*\)", "…", text, flags=re.DOTALL))[:160]


def at_random(bench: Bench, seed: int) -> None:
    """Without a guide: a case refused in a new way, or accepted with a new kind of map or file, is changed further."""
    random = Random(seed)
    pool = [mutating.fresh(random) for _ in range(SEEDS)]
    seen: set[str] = set()
    while True:
        case = mutate(random, random.choice(pool), pool)
        outcome = bench.attempt(case)
        news = shape(outcome.refusal) or f"{case.name} {case.data[:4]!r} {type(case.map)}"
        if news not in seen:
            seen.add(news)
            pool.append(case)
        if len(pool) > POOL:
            del pool[random.randrange(SEEDS)]


def guided(bench: Bench, seed: int) -> None:
    """With atheris, which prefers cases that reach new lines of keptair."""
    import atheris

    random = Random(seed)
    corpus = bench.folder / "corpus"
    corpus.mkdir(exist_ok=True)
    pool = [mutating.fresh(random) for _ in range(SEEDS)]
    for number, case in enumerate(pool):
        (corpus / f"seed-{number}").write_bytes(case.as_bytes())

    def one(raw: bytes) -> None:
        case = Case.of_bytes(raw)
        if case is not None:
            bench.attempt(case)

    def change(raw: bytes, longest: int, seed: int) -> bytes:
        old, dice = Case.of_bytes(raw), Random(seed)
        new = mutate(dice, old or dice.choice(pool), pool).as_bytes()
        return new if len(new) <= longest else raw

    options = [f"-seed={seed}", f"-max_len={2 * mutating.LONGEST}", "-len_control=0", "-reload=0", "-verbosity=0"]
    options += ["-timeout=0", "-rss_limit_mb=0", "-malloc_limit_mb=0", "-detect_leaks=0"]  # checks.py sees to these
    atheris.Setup(["fuzz", str(corpus), *options], one, custom_mutator=change)
    atheris.Fuzz()


def mutate(random: Random, case: Case, pool: list[Case]) -> Case:
    """The next case to try."""
    return mutating.fresh(random) if random.random() < SEEDED else mutating.changed(random, case, random.choice(pool))


ENGINES: dict[str, Callable[[Bench, int], None]] = {"guided": guided, "random": at_random}
