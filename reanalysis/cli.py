"""The command line. Everything heavy is imported by the command that needs it."""

from __future__ import annotations

import argparse
import io
import sys
from collections.abc import Sequence
from pathlib import Path

from reanalysis.commands.exit_codes import EXIT_STOPPED
from reanalysis.report.formats import FORMATS


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit code.

    0: all sound. 1: some study failed, or its computation is not sound. 2: wrong usage or invalid
    input. 130: stopped by the user.
    """
    _accept_any_terminal()
    options = _parser().parse_args(arguments)
    try:
        return int(_run(options))
    except KeyboardInterrupt:
        sys.stderr.write("stopped; nothing was left half-written\n")
        return EXIT_STOPPED


def _accept_any_terminal() -> None:
    """Let a terminal that lacks a character, such as the thin space before a unit, show another one."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="replace")


def _run(options: argparse.Namespace) -> int:
    if options.command == "check":
        from reanalysis.commands.check import run_check

        return run_check(options.study, allow_outside=options.allow_outside)
    from reanalysis.commands.report import ReportOptions, run_report

    return run_report(
        options.study,
        ReportOptions(
            out=options.out,
            formats=options.formats,
            allow_outside=options.allow_outside,
            cores=options.cores,
            machine=options.json,
        ),
    )


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="reanalysis",
        description="Fit a study's model both ways, frequentist and Bayesian, and report them side by side.",
        epilog="Exit codes: 0 all sound; 1 a study failed or is not sound; 2 wrong usage or invalid input.",
    )
    parser.add_argument("--version", action=_Version, nargs=0, help="print the version and exit")
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")
    check = commands.add_parser(
        "check", help="validate studies and print their models in words; fits nothing"
    )
    report = commands.add_parser("report", help="analyse studies and write one folder for each")
    for command in (check, report):
        command.add_argument("study", nargs="+", type=Path, metavar="STUDY", help="a study file (TOML)")
        command.add_argument(
            "--allow-outside",
            action="store_true",
            help="let studies read data files outside their own folder",
        )
    report.add_argument("--out", type=Path, default=Path("out"), metavar="DIR", help="default: out")
    report.add_argument(
        "--formats",
        type=_formats,
        default=FORMATS,
        metavar="LIST",
        help=f"comma-separated, among {', '.join(FORMATS)} (default: all)",
    )
    report.add_argument("--cores", type=_cores, default=2, metavar="N", help="for the sampler (default: 2)")
    report.add_argument("--json", action="store_true", help="print a summary for machines")
    return parser


class _Version(argparse.Action):
    """Prints the version; looked up only when asked for."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object, **__: object) -> None:
        from importlib.metadata import version

        sys.stdout.write(f"reanalysis {version('reanalysis')}\n")
        parser.exit()


def _formats(text: str) -> tuple[str, ...]:
    wanted = tuple(part.strip() for part in text.split(",") if part.strip())
    unknown = [part for part in wanted if part not in FORMATS]
    if unknown or not wanted:
        found = ", ".join(unknown) or "nothing"
        raise argparse.ArgumentTypeError(f"found {found}; allowed: {', '.join(FORMATS)}")
    return wanted


def _cores(text: str) -> int:
    if not text.isascii() or not text.isdigit() or not 1 <= int(text) <= 256:
        raise argparse.ArgumentTypeError(f"found {text!r}; allowed: a whole number from 1 to 256")
    return int(text)


if __name__ == "__main__":
    sys.exit(main())
