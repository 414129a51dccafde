"""The command line: it parses, calls, and returns an exit status.

0 done; 1 `--stop-at` reached; 2 unusable input or arguments; 3 a fault of the program; 130 interrupted. Reports go to
standard output, everything else to standard error.
"""

from __future__ import annotations

import gc
import os
import sys
from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from checker.model.report import Report, Reports

EXIT_STOP, EXIT_UNUSABLE, EXIT_FAULT, EXIT_INTERRUPTED = 1, 2, 3, 130
PROJECT_FILE = "withstand.yaml"


class _Group(click.Group):
    """Commands in the order they are written."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(self.commands)


def _version(context: click.Context, _: click.Parameter, wanted: bool) -> None:
    """Prints the version, "0" in a checkout that was never installed."""
    if wanted:
        from checker.reporting import tool_version

        click.echo(f"withstand {tool_version()}")
        context.exit()


@click.group(cls=_Group, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.option("--version", is_flag=True, is_eager=True, expose_value=False, callback=_version, help="Print the version.")
def command() -> None:
    """Prove, from a netlist and a bill of materials, whether an isolated power supply keeps people safe from its hazardous side.

    Withstand does not certify anything; certification bodies, licensed practice and local codes decide.
    """


def _inputs(function: Callable[..., Any]) -> Callable[..., Any]:
    """The options that say what is judged, the same on every command that reads a design."""
    for option in (
        click.option("--variant", metavar="NAME", help="Assembly variant of the netlist or the declaration."),
        click.option(
            "--ruleset", metavar="NAME|FILE", multiple=True, help="Ruleset to judge by, instead of the declaration's; repeatable."
        ),
        click.option("--declaration", metavar="FILE", help="What the netlist cannot say: supply, environment, hints."),
        click.option("--parts", metavar="FILE", multiple=True, help="Parts file with ratings and marks; repeatable."),
        click.option("--bom", metavar="FILE", multiple=True, help="Bill of materials; repeatable."),
    ):
        function = option(function)
    return function


@command.command()
@click.argument("netlist", required=False)
@_inputs
@click.option(
    "--format",
    "form",
    metavar="FORM",
    default="text",
    show_default=True,
    help="Form of the report on standard output: text, json, csv.",
)
@click.option(
    "--output", metavar="[FORM=]FILE", multiple=True, help="Write the report to a file as well; repeatable, one form each."
)
@click.option(
    "--stop-at",
    type=click.Choice(["fail", "open", "never"]),
    default="fail",
    show_default=True,
    help="What ends the run with status 1.",
)
def verify(netlist: str | None, form: str, output: tuple[str, ...], stop_at: str, **given: Any) -> int:
    """Judge a design: what is proven, what fails, what is open and the one fact that settles it.

    NETLIST is a file, or - for standard input. Without it, every design of withstand.yaml in the current folder is judged.
    """
    from checker import api, plugins
    from checker.errors import ArgumentError

    targets = [_target(text, form) for text in output]
    writers = {name: plugins.writer(name) for name in (form, *(name for name, _ in targets))}
    report: Report | Reports
    if netlist is None:
        if any(value for option, value in given.items() if option != "ruleset"):
            raise ArgumentError("--bom, --parts, --declaration and --variant belong to a NETLIST; none was given")
        if not os.path.exists(PROJECT_FILE):
            raise ArgumentError(
                f"no NETLIST was given and there is no {PROJECT_FILE} in the current folder. Name a netlist: "
                f"withstand verify board.net"
            )
        report, raised = api.verify_project(PROJECT_FILE, ruleset=given["ruleset"])
    else:
        judged = api.judged(netlist, **given)
        report, raised = judged.report, judged.raised
    _write(writers[form].write(report), [(path, writers[name].write(report)) for name, path in targets])
    return _status(report, raised, stop_at)


def _target(text: str, form: str) -> tuple[str, str]:
    """(form, file) of one --output; a bare file takes the form of --format."""
    name, mark, path = text.partition("=")
    return (name, path) if mark and name.isalnum() else (form, text)


def _write(shown: bytes, targets: Sequence[tuple[str, bytes]]) -> None:
    from checker import files
    from checker.errors import ArgumentError

    for path, data in targets:
        files.write(path, data)
    try:
        if sys.stdout is None:
            raise OSError("it is closed")
        sys.stdout.buffer.write(shown)
        sys.stdout.buffer.flush()
    except BrokenPipeError:
        raise
    except OSError as error:
        raise ArgumentError(f"standard output cannot be written ({error.strerror or error})") from None


def _status(report: Report | Reports, raised: Sequence[str], stop_at: str) -> int:
    """The exit status of a finished run, the highest that applies."""
    from checker.model.report import Reports

    for text in raised:
        click.echo(text, err=True)
    if raised:
        return EXIT_FAULT
    if isinstance(report, Reports) and report.unreadable:
        for lost in report.unreadable:
            click.echo(f"withstand: {lost.design}: {lost.message}", err=True)
        return EXIT_UNUSABLE
    reports = report.reports if isinstance(report, Reports) else [report]
    stops = any(_stops(verdict, stop_at) for one in reports for verdict in one.verdicts)
    return EXIT_STOP if stops else 0


def _stops(verdict: Any, stop_at: str) -> bool:
    if stop_at == "never" or verdict.level == "note" or verdict.conceded is not None:
        return False
    if verdict.outcome == "fail":
        return True
    return stop_at == "open" and (verdict.outcome == "open" or (verdict.outcome == "pass" and verdict.verified != "true"))


@command.command()
@click.argument("design", metavar="NETLIST|REPORT")
@_inputs
@click.option(
    "--format",
    "form",
    type=click.Choice(["text", "csv"]),
    default="text",
    show_default=True,
    help="text for a person, csv for the spacing table of the layout.",
)
def barrier(design: str, form: str, **given: Any) -> int:
    """Show the domains, the barriers between them, what each needs, and what lies across it and states.

    `--format csv` is the spacing table for the layout: a row for each separation, those that nothing lies across included, and
    for each part on its own pins.
    """
    from checker.writers import barriers
    from checker.writers import csv as tables

    report = _report(design, given)
    _write(tables.spacing(report) if form == "csv" else barriers.write(report).encode(), [])
    return 0


def _report(design: str, given: Mapping[str, Any]) -> Report | Reports:
    """A fresh report of a netlist under the options of `_inputs`, or a saved one read back."""
    from checker import api, files, limits
    from checker.writers import json as json_form

    if design != "-" and os.path.isfile(design):
        blob = files.read(design, limit=limits.REPORT_BYTES, shown=api.shown_path(design))
        if blob.data.lstrip()[:1] == b"{":
            if any(given.values()):
                from checker.errors import ArgumentError

                raise ArgumentError(
                    "a saved report holds its inputs; --bom, --parts, --declaration, --ruleset and --variant do not apply to it"
                )
            return json_form.read(blob)
    return api.verify(design, **given)


@command.command()
@click.argument("subject", metavar="RULE|FINGERPRINT|BARRIER")
@click.argument("design", metavar="[NETLIST|REPORT]", required=False)
@_inputs
def explain(subject: str, design: str | None, **given: Any) -> int:
    """Print the manual page of a RULE, or the whole derivation of one verdict or of the figures of one barrier.

    A verdict is named by the start of its FINGERPRINT, as `verify` prints it, a barrier as `barrier` prints it ('mains|+12V'); both
    are looked up in a netlist's report or a saved one.
    """
    from checker import plugins
    from checker.errors import ArgumentError

    if design is None:
        if any(given.values()):
            raise ArgumentError("these options belong to a NETLIST; to explain a rule give its name alone")
        found = plugins.rule(subject)
        click.echo(f"{found.id} ({found.hazard})\n\n{found.manual.strip()}\n\n{_caution()}")
        return 0
    report = _report(design, given)
    _write(_derivation(report, subject).encode(), [])
    return 0


def _caution() -> str:
    from checker.model.report import CAUTION

    return f"Caution: {CAUTION}"


def _derivation(report: Report | Reports, subject: str) -> str:
    """The derivation of the separation called `subject`, else of the one verdict whose fingerprint starts with it."""
    from checker.errors import ArgumentError
    from checker.model.report import Reports
    from checker.neutral import neutral
    from checker.writers import derivation

    reports = report.reports if isinstance(report, Reports) else [report]
    named = [(one, kept) for one in reports for kept in (*one.barriers, *one.separations) if kept.id == subject]
    if len(named) == 1:
        return derivation.barrier(*named[0])
    found = [(one, verdict) for one in reports for verdict in one.verdicts if verdict.fingerprint.startswith(subject)]
    if len(found) != 1:
        what = "no verdict" if not found else f"{len(found)} verdicts"
        raise ArgumentError(
            f"{what} of this report begin{'s' * (not found)} with {neutral(subject, 80)}; give more of a fingerprint it prints, or "
            f"the name of one barrier"
        )
    return derivation.write(*found[0])


@command.group(cls=_Group)
def ruleset() -> None:
    """The rulesets that designs are judged by."""


@ruleset.command("list")
def ruleset_list() -> int:
    """List every ruleset that can be named."""
    from checker import rulesets

    for found in rulesets.available():
        name = f"{found.name}:{found.edition}" if found.edition else found.name
        clauses = f"{found.clauses} clause{'s' * (found.clauses != 1)}"
        click.echo(f"{name:<24} revision {found.revision:<4} {clauses:<11} {found.unverified} unverified   {found.title}")
    click.echo(f"\n{_caution()}")
    return 0


@ruleset.command("show")
@click.argument("name", metavar="NAME|FILE")
@click.option("--clause", metavar="ID", default="", help="Only this clause and the tables it names.")
def ruleset_show(name: str, clause: str) -> int:
    """Print a ruleset: its layers, every clause with the figures it judges by and who set them, and every table."""
    from checker import rulesets
    from checker.writers import rulesets as shown

    layers = rulesets.load_layers(name)
    id = rulesets.clause_id(layers[-1], clause) if clause else ""
    _write(shown.write(layers, id).encode(), [])
    return 0


@ruleset.command("validate")
@click.argument("rulesets", metavar="FILE...", nargs=-1, required=True)
def ruleset_validate(rulesets: tuple[str, ...]) -> int:
    """Load rulesets with the layers below them and check their tables; status 2 when one cannot be used."""
    from checker import rulesets as loading
    from checker.errors import WithstandError
    from checker.neutral import harmless, neutral
    from checker.writers.rulesets import counts

    status = 0
    for name in rulesets:
        try:
            found = loading.load(name)
            wrong: list[WithstandError] = list(loading.faults(found))
        except WithstandError as error:
            wrong = [error]
        for fault in wrong:
            click.echo(harmless(f"withstand: {fault}"), err=True)
            status = EXIT_UNUSABLE
        if not wrong:
            click.echo(harmless(f"{neutral(name)}: valid, {counts(found)}"))
    return status


def main(arguments: Sequence[str] | None = None) -> None:
    """Entry point of the console script."""
    # The program makes many small records and hardly a cycle: collecting while they grow costs a third of the time on a
    # large board and frees nothing. The process ends right after.
    gc.disable()
    sys.exit(run(arguments))


def run(arguments: Sequence[str] | None = None) -> int:
    """The command line as a function: the exit status, every message already on standard error."""
    from checker.errors import WithstandError

    try:
        status = command.main(args=list(arguments) if arguments is not None else None, prog_name="withstand", standalone_mode=False)
    except click.exceptions.Abort:
        return EXIT_INTERRUPTED
    except click.ClickException as error:
        error.show()
        return EXIT_UNUSABLE
    except WithstandError as error:
        click.echo(f"withstand: {error}", err=True)
        return error.status
    except KeyboardInterrupt:
        return EXIT_INTERRUPTED
    except BrokenPipeError:
        # the reader of our output went away; there is nobody to tell
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return EXIT_UNUSABLE
    except Exception:
        import traceback

        click.echo(traceback.format_exc(), err=True)
        click.echo("withstand: a fault of the program, not of your files. Please report it with the lines above.", err=True)
        return EXIT_FAULT
    return int(status or 0)


if __name__ == "__main__":
    main()
