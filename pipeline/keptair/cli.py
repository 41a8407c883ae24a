"""The command `keptair`: each subcommand parses, calls one function, and shows what it gave."""

from __future__ import annotations

import argparse
import errno
import io
import os
import shutil
import signal
import sys
from collections.abc import Sequence
from pathlib import Path
from types import FrameType
from typing import NoReturn

from keptair import __version__
from keptair.errors import KeptairError, OutputError, StoppedError, UsageError, visible

# Everything else is imported where it is used: the help has to be there at once.


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; its exit code."""
    try:
        given = sys.argv[1:] if arguments is None else arguments
        odd = [argument for argument in given if not argument.isprintable() and not _is_text(argument)]
        if odd:
            raise UsageError(f"{odd[0]!a}: is not text", hint="a name in UTF-8")
        options = _parser().parse_args(given)
        code: int = options.command(options)
        sys.stdout.flush()
        return code
    except KeyboardInterrupt as stop:
        return _complain(StoppedError(stop.number if isinstance(stop, Terminated) else signal.SIGINT))
    except BrokenPipeError:
        # whoever read our output has seen enough; at exit Python would try to flush it once more
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except KeptairError as error:
        return _complain(error)
    except OSError as error:
        if error.errno != errno.ENOSPC:
            return _unexpected(error)
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return _complain(OutputError("standard output cannot be written (no room left)"))
    except Exception as error:
        return _unexpected(error)


def entry() -> NoReturn:
    """The console script."""
    for name in ("SIGTERM", "SIGHUP"):  # Windows has no SIGHUP
        if hasattr(signal, name):
            signal.signal(getattr(signal, name), _terminate)
    for name in ("stdout", "stderr"):
        if getattr(sys, name) is None:  # closed by whoever started us
            setattr(sys, name, open(os.devnull, "w", encoding="utf-8"))  # noqa: PTH123, SIM115
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")  # a terminal that cannot write ⊕ is no reason to fail
    sys.exit(main())


def _is_text(argument: str) -> bool:
    try:
        argument.encode()
    except UnicodeEncodeError:
        return False
    return True


class Terminated(KeyboardInterrupt):
    """SIGTERM and SIGHUP take the way of Ctrl-C: no handler of ordinary errors swallows them."""

    def __init__(self, number: int) -> None:
        self.number = number
        super().__init__()


def _terminate(number: int, _: FrameType | None) -> NoReturn:
    signal.signal(number, signal.SIG_IGN)  # once is enough: cleaning up is under way
    raise Terminated(number)


def _complain(error: KeptairError) -> int:
    _show_traceback()
    print(error, file=sys.stderr)
    return error.exit_code


def _unexpected(error: Exception) -> int:
    _show_traceback()
    where = "".join(f" ({note})" for note in getattr(error, "__notes__", []))
    print(
        f"keptair: something unexpected went wrong{where}: {type(error).__name__}: {visible(str(error))}\n"
        "This should not happen; please report it. KEPTAIR_DEBUG=1 shows where it came from.",
        file=sys.stderr,
    )
    return 1


def _show_traceback() -> None:
    if os.environ.get("KEPTAIR_DEBUG") == "1":
        import traceback

        traceback.print_exc()


def _run(options: argparse.Namespace) -> int:
    from keptair.errors import TooManyRejectsError
    from keptair.rendering import as_json, closing_summary, progress_bar
    from keptair.runs.publish import undisturbed
    from keptair.runs.running import run
    from keptair.settings import Settings

    flags = {} if options.max_rejects is None else {"max_rejects": options.max_rejects}
    settings = Settings.read(options.settings, flags)
    with progress_bar(quiet=options.quiet) as progress:
        done = run(options.catalogue, options.out, settings, options.map, options.workers, progress=progress)
    with undisturbed():  # published: there is nothing left to stop
        print(as_json(done.manifest) if options.json else done.path, flush=True)
        if not options.quiet:
            print(closing_summary(done), file=sys.stderr)
    if done.exit_code:
        rows = done.manifest["rows"]
        raise TooManyRejectsError(
            f"{rows['set_aside']} of {rows['read'] - rows['filtered']} rows were set aside, more than the share "
            f"{settings.max_rejects:g} that may be: the run is kept, but it is not the latest",
            hint=f"read {done.path / 'rejects.csv'}, mend the catalogue or its map, or raise --max-rejects",
        )
    return 0


def _check(options: argparse.Namespace) -> int:
    from keptair.catalogue.checking import check
    from keptair.rendering import as_json
    from keptair.settings import Settings

    found = check(options.catalogue, options.map, Settings())
    print(as_json(found.as_dict()) if options.json else "\n".join(found.lines()))
    return 0


def _targets(options: argparse.Namespace) -> int:
    from keptair.report import targets
    from keptair.runs.loading import find, whole

    with whole(options.run):
        found = targets.select(find(options.run), options.verdict, options.top, options.sort)
    if options.format == "table":
        sys.stdout.write(targets.as_text(found, shutil.get_terminal_size().columns))
    else:
        sys.stdout.write({"csv": targets.as_csv, "json": targets.as_json}[options.format](found))
    return 0


def _map(options: argparse.Namespace) -> int:
    from keptair.catalogue.proposing import propose
    from keptair.rendering import as_json

    proposal = propose(options.catalogue)
    print(as_json(proposal.as_dict()) if options.json else proposal.toml, end="\n" if options.json else "")
    return 0


def _trace(options: argparse.Namespace) -> int:
    from keptair.runs.loading import whole
    from keptair.worksheet import rendering, worked_sheet

    shown = {"text": rendering.as_text, "markdown": rendering.as_markdown, "json": rendering.as_json}
    with whole(options.run):
        sheet = worked_sheet(options.planet, options.run)
    print(shown["json" if options.json else options.format](sheet).rstrip("\n"))
    return 0


def _verify(options: argparse.Namespace) -> int:
    from keptair.rendering import as_json, verification
    from keptair.settings import Settings
    from keptair.verification import verify

    outcomes = verify(Settings.read(options.settings), options.bodies)
    print(as_json({"bodies": [one.as_dict() for one in outcomes]}) if options.json else verification(outcomes))
    return 0 if all(one.passed for one in outcomes) else 1


def _columns(options: argparse.Namespace) -> int:
    from keptair.rendering import data_dictionary

    print(data_dictionary(options.table))
    return 0


def _settings(options: argparse.Namespace) -> int:
    from keptair.rendering import settings_as_toml
    from keptair.settings import Settings

    toml = settings_as_toml(Settings.read(options.settings))
    if options.write is None:
        print(toml)
        return 0
    try:
        with options.write.open("x", encoding="utf-8") as file:
            file.write(toml + "\n")
    except FileExistsError:
        raise UsageError(f"{options.write}: is there already; it is left as it is", hint="another name") from None
    except OSError as error:
        raise OutputError(f"{options.write}: cannot be written ({error.strerror})") from None
    print(options.write)
    return 0


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="keptair",
        description="Which planets of a catalogue still hold an atmosphere against thermal escape.",
        epilog="Exit codes: 0 done, 1 unexpected, 2 usage or settings, 3 catalogue, 4 too many rows set aside, "
        "6 cannot write, 130 or 143 stopped. Data goes to stdout, talk to stderr.",
    )
    parser.add_argument("--version", action="version", version=f"keptair {__version__}")
    commands = parser.add_subparsers(title="commands", required=True, metavar="COMMAND")

    run = commands.add_parser("run", help="take a catalogue through every stage and publish the tables and a report")
    run.set_defaults(command=_run)
    run.add_argument("catalogue", metavar="CATALOGUE", help="table of planets: CSV, Parquet, VOTable, ECSV, FITS, …")
    run.add_argument("--out", required=True, metavar="DIR", help="folder of runs; DIR/latest is the newest")
    run.add_argument("--settings", metavar="TOML", help="settings that differ from the defaults")
    run.add_argument("--map", metavar="TOML", help="which column of the catalogue is which input")
    run.add_argument("--workers", type=int, metavar="N", help="batches worked on at the same time (the processors)")
    run.add_argument(
        "--max-rejects", type=float, metavar="SHARE", help="most rows set aside for the run to be the latest (0.2)"
    )
    run.add_argument("--quiet", action="store_true", help="no progress, no closing summary")
    run.add_argument("--json", action="store_true", help="print the `run` object instead of the run's folder")

    check = commands.add_parser("check", help="only say what would be read, set aside and emptied, and why")
    check.set_defaults(command=_check)
    check.add_argument("catalogue", metavar="CATALOGUE", help="as for run")
    check.add_argument("--map", metavar="TOML", help="as for run")
    check.add_argument("--json", action="store_true", help="the same as JSON")

    targets = commands.add_parser("targets", help="which planets of a run to look at first")
    targets.set_defaults(command=_targets)
    targets.add_argument("run", metavar="RUN", help="a run's folder, or the folder of runs for its latest")
    targets.add_argument(
        "--verdict",
        nargs="+",
        action="extend",
        default=[],
        metavar="V",
        help="only these verdicts, such as secondary undecided",
    )
    targets.add_argument("--top", type=int, default=20, metavar="N", help="how many planets (20)")
    targets.add_argument(
        "--sort", choices=["priority", "tsm", "esm", "decisive"], default="priority", help="strongest first"
    )
    targets.add_argument("--format", choices=["table", "csv", "json"], default="table", help="how to print them")

    column_map = commands.add_parser("map", help="propose a column map for a catalogue, as TOML")
    column_map.set_defaults(command=_map)
    column_map.add_argument("catalogue", metavar="CATALOGUE", help="as for run")
    column_map.add_argument("--json", action="store_true", help="the guesses with reason and confidence, as JSON")

    trace = commands.add_parser("trace", help="the worked sheet of one planet: every step, value, formula and source")
    trace.set_defaults(command=_trace)
    trace.add_argument("planet", metavar="PLANET", help="its planet_id")
    trace.add_argument("run", metavar="RUN", help="a run's folder, or the folder of runs for its latest")
    trace.add_argument("--format", choices=["text", "markdown", "json"], default="text", help="how to print it")
    trace.add_argument("--json", action="store_true", help="the same as --format json")

    verify = commands.add_parser("verify", help="the Solar System through your settings, expected against obtained")
    verify.set_defaults(command=_verify)
    verify.add_argument("--settings", metavar="TOML", help="settings that differ from the defaults")
    verify.add_argument("--bodies", type=Path, metavar="TOML", help="bodies of your own, beside those built in")
    verify.add_argument("--json", action="store_true", help="the same as JSON")

    columns = commands.add_parser("columns", help="the data dictionary")
    columns.set_defaults(command=_columns)
    columns.add_argument("table", nargs="?", metavar="TABLE", help="catalogue, planets, gases, rejects or changes")

    settings = commands.add_parser("settings", help="every setting, its value, what it does and where it came from")
    settings.set_defaults(command=_settings)
    settings.add_argument("--settings", metavar="TOML", help="settings that differ from the defaults")
    settings.add_argument("--write", type=Path, metavar="FILE", help="start a settings file with them")
    return parser
