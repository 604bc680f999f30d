"""The command line: parse, make one library call, print the outcome, set the exit code.

Heavy imports stand inside the commands, so that --help answers at once.
"""

import argparse
import json
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import oceanbox

if TYPE_CHECKING:
    from oceanbox.experiment.api import Finished

__all__ = ["main"]

DONE = 0
OTHER_ERROR = 1
BAD_CONFIG = 2
NOT_IN_EQUILIBRIUM = 3
UNSTABLE = 4
INTERRUPTED = 5
CASES_FAILED = 6

EXIT_CODES = """\
exit codes:
  0  done
  1  a file is missing, damaged or belongs to another run
  2  the configuration or the command line cannot be used
  3  not in equilibrium in the time allowed (the result is written)
  4  unstable (the last sound state is kept)
  5  interrupted (the same command goes on)
  6  some cases of a study failed (all others are done)"""


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="oceanbox",
        description="What sets the depth of the tropical thermocline: a reduced-gravity ocean, from config to figures.",
        epilog=EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--version", action="version", version=f"oceanbox {oceanbox.__version__}")
    commands = parser.add_subparsers(metavar="COMMAND", required=True)

    def command(name: str, run: Callable[[argparse.Namespace], int], words: str) -> argparse.ArgumentParser:
        added = commands.add_parser(
            name, help=words, description=words, epilog=EXIT_CODES, formatter_class=argparse.RawDescriptionHelpFormatter
        )
        added.set_defaults(run=run)
        return added

    config_help = "a configuration in YAML; `oceanbox keys` explains every key"
    added = command("scales", _scales, "derived scales, resolution, step and predicted cost of a configuration; no run")
    added.add_argument("config", metavar="CONFIG", type=Path, help=config_help)

    added = command("equilibrate", _equilibrate, "run to equilibrium")
    added.add_argument("config", metavar="CONFIG", type=Path, help=config_help)
    added.add_argument("--into", metavar="DIR", type=Path, help="folder of the run (default: results/<name>)")

    added = command("evolve", _evolve, "run for the time the configuration states")
    added.add_argument("config", metavar="CONFIG", type=Path, help=config_help)
    added.add_argument("--into", metavar="DIR", type=Path, help="folder of the run (default: results/<name>)")
    added.add_argument(
        "--from",
        dest="start",
        metavar="STATE",
        type=Path,
        help="state.nc of another run of the same grid to start from",
    )

    added = command("study", _study, "run whatever of a study is missing, and collect all of it")
    added.add_argument("study", metavar="STUDY", type=Path, help="a study in YAML")
    added.add_argument("--into", metavar="DIR", type=Path, help="folder of the study (default: results/<name>)")
    added.add_argument("--workers", metavar="N", type=_count, help="worker processes (default: one for each processor)")
    added.add_argument("--scheduler", metavar="ADDRESS", help="run on the workers of this dask.distributed scheduler")
    added.add_argument("--dry", action="store_true", help="list the cases and the predicted cost; run nothing")

    added = command("figures", _figures, "figures of a result, from its file alone")
    added.add_argument("result", metavar="RESULT", type=Path, help="result.nc of a run")
    added.add_argument("--page", metavar="PAGE.yaml", type=Path, help="the page to draw (default: an overview)")
    added.add_argument("--into", metavar="DIR", type=Path, help="folder of the figures (default: beside the result)")
    added.add_argument(
        "--formats", metavar="LIST", default="pdf,png", help="any of pdf, svg, png, comma between (default: pdf,png)"
    )

    added = command("keys", _keys, "every key of a configuration: unit, default, meaning")
    added.add_argument("key", metavar="KEY", nargs="?", help="only keys that start with this")
    added.add_argument("--json-schema", action="store_true", help="the schema for editors, as JSON")
    return parser


def _scales(options: argparse.Namespace) -> int:
    from oceanbox.experiment.api import check
    from oceanbox.experiment.cost import seconds_per_step
    from oceanbox.experiment.scales import derive_scales
    from oceanbox.scales_table import table
    from oceanbox.terminal import tell

    checked = check(options.config)
    _announce_compilation()
    print(table(checked.setup, derive_scales(checked.setup), seconds_per_step(checked.setup)))
    for warning in checked.warnings:
        tell(f"warning: {warning}")
    return DONE


def _announce_compilation() -> None:
    from oceanbox.compiling import cache_is_warm
    from oceanbox.terminal import tell

    if not cache_is_warm():
        tell("compiling the equations for this machine; this happens once and takes up to a minute")


def _report_finished(finished: "Finished") -> int:
    from oceanbox.experiment.outcome import Ending

    if finished.found:
        print(f"{finished.path} was finished before: {finished.outcome}")
    else:
        print(f"{finished.path}: {finished.outcome}")
    return NOT_IN_EQUILIBRIUM if finished.outcome.ending is Ending.NOT_IN_EQUILIBRIUM else DONE


def _warn(options: argparse.Namespace) -> None:
    from oceanbox.experiment.api import check
    from oceanbox.terminal import tell

    for warning in check(options.config).warnings:
        tell(f"warning: {warning}")


def _equilibrate(options: argparse.Namespace) -> int:
    from oceanbox.experiment.api import equilibrate
    from oceanbox.terminal import reporting

    _warn(options)
    _announce_compilation()
    with reporting() as report:
        finished = equilibrate(options.config, options.into, report=report)
    return _report_finished(finished)


def _evolve(options: argparse.Namespace) -> int:
    from oceanbox.experiment.api import evolve
    from oceanbox.terminal import reporting

    _warn(options)
    _announce_compilation()
    with reporting() as report:
        finished = evolve(options.config, options.into, options.start, report)
    return _report_finished(finished)


def _count(text: str) -> int:
    if not text.isdecimal() or int(text) < 1:
        raise argparse.ArgumentTypeError(f"got {text}; must be a whole number >= 1; leave it out for one per processor")
    return int(text)


def _study(options: argparse.Namespace) -> int:
    if options.dry:
        return _dry_study(options)
    from oceanbox.study.run import run_study
    from oceanbox.study_progress import study_reporting
    from oceanbox.terminal import tell

    _announce_compilation()
    try:
        with study_reporting() as report:
            outcome = run_study(options.study, options.into, options.workers, options.scheduler, report, tell)
    except KeyboardInterrupt:
        tell("interrupted; what was running is saved, and the same command goes on")
        raise
    for line in (*outcome.failures(), *outcome.findings):
        tell(line)
    print(f"{outcome.into}: {outcome}")
    for path in outcome.paths:
        print(path)
    if outcome.failed:
        return CASES_FAILED
    return NOT_IN_EQUILIBRIUM if outcome.unsettled else DONE


def _dry_study(options: argparse.Namespace) -> int:
    from oceanbox.study.engines.local import default_workers
    from oceanbox.study.run import dry_run
    from oceanbox.study_progress import duration

    _announce_compilation()
    found = dry_run(options.study, options.into)
    for case, status in zip(found.cases, found.statuses, strict=True):
        print(f"{status.state.value:<8} {case.identity[:16]}  {case.name}")
    workers = options.workers or default_workers()
    cost = duration(found.total_seconds(workers))
    print(f"{found.left} of {len(found.cases)} cases to run: about {cost} on {workers} workers, by {found.basis}")
    return DONE


def _figures(options: argparse.Namespace) -> int:
    from oceanbox.figures import draw, load_page

    page = load_page(options.page) if options.page is not None else None
    into = options.into if options.into is not None else options.result.parent
    for path in draw(options.result, page, into, tuple(options.formats.split(","))):
        print(path)
    return DONE


def _keys(options: argparse.Namespace) -> int:
    from oceanbox.config import json_schema, reference_text
    from oceanbox.config.reference import keys_text

    if options.json_schema:
        print(json.dumps(json_schema(), indent=2))
    elif options.key:
        print(keys_text(options.key))
    else:
        print(reference_text())
    return DONE


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; the exit code is returned, messages for people go to standard error."""
    options = _parser().parse_args(arguments)
    from oceanbox.errors import ConfigError, InterruptedRun, OceanboxError, UnstableRun

    codes = {ConfigError: BAD_CONFIG, UnstableRun: UNSTABLE, InterruptedRun: INTERRUPTED}
    try:
        return int(options.run(options))
    except OceanboxError as error:
        print(error, file=sys.stderr)
        return next((code for kind, code in codes.items() if isinstance(error, kind)), OTHER_ERROR)
    except FileNotFoundError as error:
        print(error, file=sys.stderr)
        return OTHER_ERROR
    except KeyboardInterrupt:
        return INTERRUPTED
    except BrokenPipeError:
        return DONE


if __name__ == "__main__":
    sys.exit(main())
