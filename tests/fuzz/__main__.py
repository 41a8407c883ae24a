"""Fuzzes the reader, the column map, the screen and the fingerprint: PYTHONPATH=tests python -m fuzz --seconds 600"""

from __future__ import annotations

import argparse
import faulthandler
import resource
import shutil
import subprocess
import sys
import time
from importlib.util import find_spec
from pathlib import Path

MOST_MEMORY = 6 << 30  # bytes of address space: the machine outlives a case that asks for all of it
STUCK = 60  # seconds after which a case that nothing can interrupt ends the process


def main() -> int:
    """Look after the process that fuzzes; begin again where it dies; 1 if anything was unclean."""
    options = _options()
    if options.until:
        return _work(options)
    shutil.rmtree(options.folder, ignore_errors=True)
    options.folder.mkdir(parents=True)
    until = time.time() + options.seconds
    again = [sys.executable, "-m", "fuzz", *sys.argv[1:], "--until", str(until), "--seed"]
    seed = options.seed
    while time.time() < until:
        output = (options.folder / "output.txt").open("ab")
        with output:
            code = subprocess.run([*again, str(seed)], stdout=output, stderr=output).returncode
        seed += 1
        if code:
            _note_death(options, code)
    bench = _bench(options, until)
    bench.write(f"end: {bench.summary()}")
    print(bench.summary(), f"cases are in {options.folder}" if bench.kinds else "")
    for kind, count in bench.kinds.most_common():
        print(f"{count:8} {kind!r}")
    return 1 if bench.kinds else 0


def _work(options: argparse.Namespace) -> int:
    resource.setrlimit(resource.RLIMIT_AS, (MOST_MEMORY, MOST_MEMORY))
    faulthandler.enable()
    if options.engine == "guided":
        import atheris

        with atheris.instrument_imports(include=["keptair"]):
            import keptair.catalogue.checking
            import keptair.stages.screen  # noqa: F401
    from fuzz import fuzz

    bench = _bench(options, options.until)
    attempt = bench.attempt

    def watched(case):  # type: ignore[no-untyped-def]
        faulthandler.dump_traceback_later(STUCK, exit=True)
        return attempt(case)

    bench.attempt = watched
    fuzz.ENGINES[options.engine](bench, options.seed)
    return 0


def _note_death(options: argparse.Namespace, code: int) -> None:
    """The case under way killed the process, or nothing could interrupt it."""
    from fuzz.case import Case

    bench = _bench(options, 0)
    current = options.folder / "current.case"
    case = Case.of_bytes(current.read_bytes()) if current.exists() else None
    if case is None:
        raise SystemExit(f"the fuzzer itself does not start; see {options.folder / 'output.txt'}")
    bench.counts.update(("tried", "unclean"))
    bench.keep(case, f"the process ended with {code}")
    bench.save()


def _bench(options: argparse.Namespace, until: float):  # type: ignore[no-untyped-def]
    from fuzz.fuzz import Bench

    return Bench(options.folder, options.log or options.folder / "fuzz.log", until)


def _options() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m fuzz", description=__doc__)
    engine = "guided" if find_spec("atheris") else "random"
    parser.add_argument("--seconds", type=float, default=60, help="how long (60)")
    parser.add_argument("--seed", type=int, default=1, help="where chance begins (1)")
    parser.add_argument("--engine", choices=["guided", "random"], default=engine, help="guided needs atheris")
    parser.add_argument("--folder", type=Path, default=Path("build/fuzz"), help="unclean cases go there (build/fuzz)")
    parser.add_argument("--log", type=Path, help="a line each minute goes there (fuzz.log in the folder)")
    parser.add_argument("--until", type=float, help=argparse.SUPPRESS)
    return parser.parse_args()


if __name__ == "__main__":
    sys.exit(main())
