"""The command line and what strangers hand to it: the exit status, one clear message, and nothing else.

Bad input ends with status 2, a message on standard error that names the file, nothing on standard output and no traceback. Most
tests call `checker.cli.run`; those about processes (pipes, locale, the current folder) start one.
"""

from __future__ import annotations

import csv
import os
import re
import shutil
import subprocess
import sys
import unicodedata
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from checker import cli, plugins
from checker.files import Blob
from checker.files import read as read_file
from checker.model.report import Report, Reports
from checker.readers import sniff
from checker.writers import json as json_form

ROOT = Path(__file__).resolve().parents[1]
DESIGNS = ROOT / "fixtures" / "designs"
DEMO, WRONG = DESIGNS / "greenhouse", DESIGNS / "greenhouse-wrong"
SMALL = (
    '(export (version "E")\n (components\n  (comp (ref "R1") (value "1k"))\n  (comp (ref "R2") (value "1k")))\n'
    ' (nets (net (code "1") (name "A") (node (ref "R1") (pin "1")) (node (ref "R2") (pin "1")))))\n'
)
BOM = "Reference,Value,Description\nR1,1k,RES 1K 1% 1/4W 1206\nR2,1k,RES 1K 1% 1/4W 1206\n"

Run = Callable[..., "Done"]


class Done:
    """What one call left: the exit status, standard output and standard error."""

    def __init__(self, status: int, out: bytes, err: str):
        self.status, self.out, self.err = status, out, err

    def refused(self, *words: str) -> None:
        """Unusable input: status 2, one line on standard error with these words, nothing on standard output."""
        assert (self.status, self.out) == (2, b""), self.err
        assert "Traceback" not in self.err
        assert self.err.startswith("withstand: ")
        assert self.err.count("\n") == 1
        assert unsafe(self.err) == set()
        for word in words:
            assert word in self.err


def unsafe(text: str) -> set[str]:
    """Characters but the line feed that could move a cursor, colour a terminal or reorder the text around them."""
    return {character for character in text if unicodedata.category(character) in ("Cc", "Cf", "Zl", "Zp", "Cs")} - {"\n"}


@pytest.fixture
def desk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder to work in, with the demo and a small board; its path holds a name that no output may show."""
    folder = tmp_path / "anna-private" / "desk"
    shutil.copytree(DEMO, folder)
    (folder / "small.net").write_text(SMALL)
    (folder / "small.csv").write_text(BOM)
    monkeypatch.chdir(folder)
    return folder


@pytest.fixture
def run(capsysbinary: pytest.CaptureFixture[bytes]) -> Run:
    """Calls the command line in this process; no output may hold the private folder."""

    def call(*arguments: str | Path) -> Done:
        capsysbinary.readouterr()
        status = cli.run([os.fspath(argument) for argument in arguments])
        out, err = capsysbinary.readouterr()
        assert b"anna-private" not in out
        return Done(status, out, err.decode())

    return call


def verify_demo(folder: Path | str = "") -> list[str]:
    """The arguments that judge the demo in `folder`."""
    at = [str(Path(folder, name)) for name in ("greenhouse.net", "bom.csv", "declaration.yaml")]
    return ["verify", at[0], "--bom", at[1], "--declaration", at[2]]


# --- netlists --------------------------------------------------------------------------------------------------------


def test_the_files_around_which_the_others_are_built_are_judged(run: Run, desk: Path) -> None:
    done = run("verify", "small.net", "--bom", "small.csv")
    assert done.status in (0, 1)
    assert done.err == ""
    assert b"small" in done.out


@pytest.mark.parametrize("option", [(), ("--bom",), ("--parts",), ("--declaration",), ("--ruleset",)])
@pytest.mark.parametrize("kind", ["missing", "folder", "pipe", "device"])
def test_what_is_no_file(run: Run, desk: Path, option: tuple[str, ...], kind: str) -> None:
    name = "board.yaml"
    match kind:
        case "folder":
            (desk / name).mkdir()
        case "pipe":
            os.mkfifo(desk / name)  # opening it would wait for a writer for ever
        case "device":
            (desk / name).symlink_to("/dev/zero")
    words = {"missing": "there is no such file", "folder": "this is a folder"}.get(kind, "not a regular file")
    run("verify", *(("small.net", *option) if option else ()), name).refused("board.yaml", words)


@pytest.mark.parametrize("command", ["verify", "barrier"])
@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "an empty file"),
        (b" \n\t", "an empty file"),
        (SMALL.encode()[:-40], "ends inside the form"),
        (SMALL.encode()[:30], "ends inside the form"),
        (SMALL.encode() + b"(more)", "text after the end"),
        (b'(export (components (comp (ref "R1"))) (nets))', "holds no nets"),
        (b"(export (components (comp (ref R1))))", "no section `nets`"),
        (b"(" * 20_000_000, "text in parentheses"),
        (b"(export " + b"(" * 20_000_000, "nested too deep"),
        (b'<?xml version="1.0"?>\n<!DOCTYPE export>\n<export/>', "document type"),
        (b'<!DOCTYPE export [<!ENTITY x SYSTEM "file:///etc/passwd">]><export>&x;</export>', "document type"),
        (b"<export><components>", "the XML is damaged"),
        (SMALL.encode().replace(b"1k", b"1\0k"), "NUL"),
        (b"\0" * 5000, "binary data"),
        (b"<?xml version='1.0' encoding='UTF-7'?><export/>", "encoding"),
        (SMALL.replace("1k", "1\u03a9").encode("utf-16")[:-1], "found binary data"),
        (SMALL.encode("utf-32"), "found binary data"),
        (SMALL.encode().replace(b"1k", b"1\x81\x8d"), "fits no accepted encoding"),
    ],
)
def test_netlists_that_cannot_be_used(run: Run, desk: Path, command: str, data: bytes, words: str) -> None:
    (desk / "board.net").write_bytes(data)
    run(command, "board.net").refused("board.net", words)


@pytest.mark.parametrize(
    ("data", "form"),
    [
        (b"(edif top (edifVersion 2 0 0))", "an EDIF 2 0 0 file"),
        (b"(layout (x))", "an S-expression file of another kind (keyword layout)"),
        (b"# Some Netlist Version 1.1 created today\n( { }", "a legacy parenthesised netlist"),
        (b"<IPC-2581 revision='C'/>", "an IPC-2581 file"),
        (b"<svg width='1'/>", "an XML file of another kind (root element svg)"),
        (b"< not markup", "an XML file of unknown kind"),
        (b"P  CODE 00\n317GND              VIA        MD0118PA00X+058547", "an IPC-D-356 netlist"),
        (b"* a circuit\nR1 a b 1k\n", "a SPICE netlist"),
        (b"PK\x03\x04\x14\0", "a spreadsheet workbook (zip)"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1", "a spreadsheet workbook of the old binary form"),
        (b"%PDF-1.7\n\xe2\xe3", "a PDF document"),
        (b"%FSLAX46Y46*%\n", "a Gerber file"),
        (b"M48\nMETRIC\n", "a drill file"),
        (BOM.encode(), "a delimited table"),
        (b"designs:\n  a: {netlist: a.net}\n", "a YAML file"),
        (b'{"schema": "withstand-report/1"}', "a JSON file"),
        (b"\x7fELF\x02\x01\0\0\0", "binary data"),
        (b"some words\nand more\n", "text of no known form"),
    ],
)
def test_a_file_of_another_form_is_named(run: Run, desk: Path, data: bytes, form: str) -> None:
    (desk / "board.net").write_bytes(data)
    assert sniff.describe(sniff.head(Blob("board.net", data))) == form
    taken = any(reader.claims(sniff.head(Blob("board.net", data))) for reader in plugins.readers("netlist"))
    run("verify", "board.net").refused(
        "board.net", *(() if taken else (f"found {form}", "expected S-expression netlist, XML netlist"))
    )


def test_the_suffix_does_not_matter(run: Run, desk: Path) -> None:
    shutil.copy("greenhouse.xml", "board.net")
    assert run("verify", "board.net", "--stop-at", "never").status == 0


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "an empty file"),
        (SMALL.encode(), "an S-expression netlist"),
        (b"PK\x03\x04\x14\0", "the workbook is damaged"),
        (b"Price,Supplier,Stock\n1,2,3\n", "no header with a reference column"),
        (b'Reference,Value\nR1,"1k\nR2,1k\n', "a quote is opened and never closed"),
        (b"Reference,Value\nR1,1\0k\n", "binary data"),
        (b"Reference," + b"V," * 5000 + b"\nR1\n", "too many columns"),
    ],
)
def test_bills_of_materials_that_cannot_be_used(run: Run, desk: Path, data: bytes, words: str) -> None:
    (desk / "list.csv").write_bytes(data)
    run("verify", "small.net", "--bom", "list.csv").refused("list.csv", words)


def test_a_file_over_the_size_limit_is_refused_before_it_is_read(run: Run, desk: Path) -> None:
    with (desk / "board.net").open("wb") as stream:
        stream.truncate(2**40)  # a hole; takes no room on the disk
    run("verify", "board.net").refused("board.net", "too large")
    with (desk / "d.yaml").open("wb") as stream:
        stream.truncate(2**40)
    run("verify", "small.net", "--declaration", "d.yaml").refused("d.yaml", "too large")


# --- YAML ------------------------------------------------------------------------------------------------------------

YAML_FAULTS = [
    ("supply: {mains: 230 V, mains: 120 V}", 1, "mains"),
    ("supply:\n  mains: 230 V\nsupply:\n  dc: 24 V", 3, "supply"),
    ("supply: &a {mains: 230 V}", 1, "anchor"),
    ("environment: {altitude: 2000 m}\nsupply: *a", 2, "alias"),
    ("supply: !!python/object/apply:os.system ['true']", 1, "tag"),
    ("supply: !local {mains: 230 V}", 1, "tag"),
    ("supply:\n  mains: 230 A", 2, "V"),
    ("supply:\n  mains: 230", 2, "V"),
    ("environment:\n  altitude: 2000 kg", 2, "m"),
    ("supply: {mians: 230 V}", 1, "mains"),
    ("suply: none", 1, "supply"),
    ("supply: {mains: 230 V}\n---\nsupply: none", 2, "document"),
    ("supply: {<<: {mains: 230 V}}", 1, "merge"),
    ("supply: [", 1, ""),
    ("supply:\n\tmains: 230 V", 2, ""),
    ("- a list", 1, "found a list"),
    ("a: " + "[" * 2000, 1, "nesting"),
    ("supply: {mains: .inf V}", 1, ""),
    ("supply: {mains: 1e999 V}", 1, ""),
    ('supply: {"\\x1b[31m": 1}', 1, ""),
]


@pytest.mark.parametrize(("text", "line", "words"), YAML_FAULTS)
def test_declarations_that_cannot_be_used(run: Run, desk: Path, text: str, line: int, words: str) -> None:
    (desk / "d.yaml").write_text(text)
    run("verify", "small.net", "--declaration", "d.yaml").refused(f"d.yaml:{line}: ", words)


def test_a_parts_file_or_ruleset_of_another_schema_is_named(run: Run, desk: Path) -> None:
    (desk / "d.yaml").write_text("schema: withstand-declaration/1\n")
    run("verify", "small.net", "--parts", "d.yaml").refused("d.yaml")
    run("verify", "small.net", "--ruleset", "d.yaml").refused("d.yaml", "withstand-ruleset/1")


# --- arguments -------------------------------------------------------------------------------------------------------


def test_arguments_that_cannot_be_used(run: Run, desk: Path) -> None:
    run("verify", "small.net", "--format", "xyz").refused("there is no output form xyz")
    run("verify", "small.net", "--format", "jsom").refused("json")
    run("verify", "small.net", "--ruleset", "iec-62368").refused("there is no ruleset iec-62368", "iec-62368-1")
    run("verify", "small.net", "--ruleset", "iec-62368-1:1900").refused("1900")
    run("verify", "small.net", "--variant", "eu").refused("eu")
    run("verify").refused("no NETLIST was given", "withstand.yaml")
    run("verify", "--bom", "small.csv").refused("belong to a NETLIST")
    run("explain", "no-such-rule").refused("no-such-rule")
    run("verify", "small.net", "--output", "xyz=report").refused("there is no output form xyz")
    assert not (desk / "report").exists()


@pytest.mark.parametrize(
    "arguments",
    [
        ("verify", "--frobnicate"),
        ("verify", "small.net", "--stop-at", "maybe"),
        ("barrier", "small.net", "--format", "json"),
        ("ruleset", "validate", "--frobnicate"),
        ("frobnicate",),
    ],
)
def test_usage_errors_are_for_the_parser(run: Run, desk: Path, arguments: tuple[str, ...]) -> None:
    done = run(*arguments)
    assert (done.status, done.out) == (2, b"")
    assert done.err.startswith("Usage: withstand")
    assert arguments[-1] in done.err


def test_hostile_arguments_are_shown_neutral(run: Run, desk: Path) -> None:
    for evil in ("\x1b[31mboard.net", "a\nb::error::", "\u202eten.net", "\udcff.net"):
        run("verify", evil).refused()
        run("verify", "small.net", "--format", evil).refused()
        run("verify", "small.net", "--ruleset", evil).refused()
        run("verify", "small.net", "--variant", evil).refused()
        run("explain", evil).refused()


def test_an_empty_name_is_no_file(run: Run, desk: Path) -> None:
    run("verify", "").refused()
    run("verify", "small.net", "--bom", "").refused()
    run("verify", "small.net", "--output", "").refused()
    run("verify", "small.net", "--output", "json=").refused()
    run("verify", "a\0b").refused()


# --- status ----------------------------------------------------------------------------------------------------------


def test_statuses_of_finished_runs(run: Run, desk: Path) -> None:
    assert run(*verify_demo()).status == 0
    assert run(*verify_demo(WRONG)).status == 1
    assert run(*verify_demo(WRONG), "--stop-at", "never").status == 0
    report = report_of(run(*verify_demo(), "--format", "json").out)
    weak = [
        v for v in report.verdicts if v.level != "note" and (v.outcome == "open" or (v.outcome == "pass" and v.verified != "true"))
    ]
    assert run(*verify_demo(), "--stop-at", "open").status == (1 if weak else 0)


def report_of(data: bytes) -> Report:
    report = json_form.read(Blob("report", data))
    assert isinstance(report, Report)
    return report


def test_a_rule_that_raises_ends_with_3_and_leaves_its_question_open(run: Run, desk: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from dataclasses import replace

    def broken(*_: object) -> Iterator[None]:
        raise ZeroDivisionError("deliberate")
        yield

    rule = plugins.rule

    def spoilt(id: str):  # type: ignore[no-untyped-def]
        return replace(rule(id), ask=broken) if id == "fuse" else rule(id)

    monkeypatch.setattr(plugins, "rule", spoilt)
    done = run(*verify_demo(), "--format", "json")
    assert done.status == 3
    assert "deliberate" in done.err
    verdicts = [verdict for verdict in report_of(done.out).verdicts if verdict.rule == "fuse"]
    assert verdicts
    assert {(verdict.outcome, verdict.level) for verdict in verdicts} == {("open", "error")}


# --- project files ---------------------------------------------------------------------------------------------------


def test_one_unreadable_design_of_two_ends_with_2_and_the_other_is_judged(run: Run, desk: Path) -> None:
    good = "good: {netlist: greenhouse.net, bom: bom.csv, declaration: declaration.yaml}"
    (desk / "withstand.yaml").write_text(f"designs:\n  bad: {{netlist: none.net}}\n  {good}\n")
    done = run("verify", "--format", "json")
    assert done.status == 2
    assert "bad" in done.err
    assert "none.net: there is no such file" in done.err
    assert "Traceback" not in done.err
    reports = json_form.read(Blob("reports", done.out))
    assert isinstance(reports, Reports)
    assert [report.design for report in reports.reports] == ["good"]
    assert [lost.design for lost in reports.unreadable] == ["bad"]
    alone = report_of(run(*verify_demo(), "--format", "json").out)
    assert [(v.fingerprint, v.outcome) for v in reports.reports[0].verdicts] == [(v.fingerprint, v.outcome) for v in alone.verdicts]
    assert b"none.net: there is no such file" in run("verify").out


def test_a_design_with_an_unknown_ruleset_does_not_cost_the_others(run: Run, desk: Path) -> None:
    (desk / "withstand.yaml").write_text(
        "designs:\n  bad: {netlist: small.net, ruleset: no-such-ruleset}\n  good: {netlist: small.net}\n"
    )
    done = run("verify", "--format", "json")
    assert done.status == 2
    assert "no-such-ruleset" in done.err
    reports = json_form.read(Blob("reports", done.out))
    assert isinstance(reports, Reports)
    assert [report.design for report in reports.reports] == ["good"]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "designs"),
        ("designs: {}", "designs"),
        ("designs: {a: {netlist: ../../secret.net}}", "outside"),
        ("designs: {a: {netlist: /etc/passwd}}", "outside"),
        ("designs: {a: {netlist: link.net}}", "outside"),
        ("designs: {a: {netlst: small.net}}", "netlist"),
        ("designs: {a: {netlist: small.net}, a: {netlist: small.net}}", "a"),
        ("designs: {a: &x {netlist: small.net}, b: *x}", "anchor"),
    ],
)
def test_project_files_that_cannot_be_used(run: Run, desk: Path, text: str, words: str) -> None:
    (desk / "link.net").symlink_to("/etc/passwd")
    (desk / "withstand.yaml").write_text(text)
    run("verify").refused("withstand.yaml", words)


# --- output ----------------------------------------------------------------------------------------------------------


def test_outputs_that_cannot_be_written(run: Run, desk: Path) -> None:
    (desk / "aim.txt").write_text("precious")
    (desk / "link.txt").symlink_to("aim.txt")
    (desk / "folder").mkdir()
    run("verify", "small.net", "--output", "link.txt").refused("link.txt", "is a link")
    run("verify", "small.net", "--output", "folder").refused("folder", "is a folder")
    run("verify", "small.net", "--output", "absent/report.txt").refused("absent/report.txt")
    assert (desk / "aim.txt").read_text() == "precious"
    assert [path.name for path in desk.iterdir() if path.name.startswith(".")] == []


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser writes everywhere")
def test_a_folder_that_may_not_be_written(run: Run, desk: Path) -> None:
    (desk / "closed").mkdir(mode=0o500)
    run("verify", "small.net", "--output", "closed/report.txt").refused("closed/report.txt", "cannot be written")


def test_json_goes_to_a_file_and_comes_back_equal(run: Run, desk: Path) -> None:
    shown = run(*verify_demo(), "--output", "json=report.json")
    printed = run(*verify_demo(), "--format", "json")
    assert shown.status == printed.status
    assert (desk / "report.json").read_bytes() == printed.out
    report = json_form.read(read_file("report.json"))
    assert json_form.write(report) == printed.out
    assert shown.out == plugins.writer("text").write(report)  # the saved report holds everything that is printed
    for form in ("text", "csv"):
        assert run("barrier", "report.json", "--format", form).out == run("barrier", *verify_demo()[1:], "--format", form).out


def test_the_tables_are_tables(run: Run, desk: Path) -> None:
    """Every row of both tables has the cells of its header; a verdict, and a separation or part, is a row."""
    for arguments in (verify_demo(), verify_demo(WRONG)):
        report = report_of(run(*arguments, "--format", "json").out)
        done = run(*arguments, "--format", "csv")
        header, *rows = csv.reader(done.out.decode().splitlines(), strict=True)
        assert {len(row) for row in rows} == {len(header)}
        assert [row[header.index("fingerprint")] for row in rows] == [verdict.fingerprint for verdict in report.verdicts]
        header, *rows = csv.reader(run("barrier", *arguments[1:], "--format", "csv").out.decode().splitlines(), strict=True)
        assert {len(row) for row in rows} == {len(header)}
        wanted = {
            (kept.id, part) for kept in (*report.barriers, *report.separations) for part in ("", *(p.part for p in kept.parts))
        }
        assert {(row[1], row[4]) for row in rows} == wanted


def test_every_figure_of_a_barrier_can_be_explained(run: Run, desk: Path) -> None:
    done = run("explain", "mains|+12V", *verify_demo()[1:])
    assert (done.status, done.err) == (0, "")
    assert b"Separation mains | +12V: reinforced (barrier)\n" in done.out
    assert b"CY1: why it lies across\n" in done.out
    assert b"(greenhouse.net:" in done.out
    run("explain", "mains|+13V", *verify_demo()[1:]).refused("no verdict", "mains|+13V", "name of one barrier")


def test_the_same_inputs_give_the_same_bytes(run: Run, desk: Path) -> None:
    for form in plugins.forms():
        for arguments in (verify_demo(), verify_demo(WRONG)):
            first = run(*arguments, "--format", form).out
            assert first
            assert run(*arguments, "--format", form).out == first


def test_hash_order_does_not_show(desk: Path) -> None:
    for form in plugins.forms():
        outs = {
            python(*verify_demo(WRONG), "--format", form, environment={"PYTHONHASHSEED": seed}, status=1).out
            for seed in ("1", "2", "77")
        }
        assert len(outs) == 1


def test_no_absolute_path_is_shown(run: Run, desk: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (desk / "house.yaml").write_text("schema: withstand-ruleset/1\nid: house\nrevision: '1'\nbased_on: iec-62368-1\n")
    ruleset = ("--ruleset", str(desk / "house.yaml"))
    inside = [run(*verify_demo(desk), *extra, "--format", form) for form in plugins.forms() for extra in ((), ruleset)]
    elsewhere = desk.parent / "elsewhere"
    elsewhere.mkdir()
    monkeypatch.chdir(elsewhere)
    outside = [run(*verify_demo(desk), *extra, "--format", form) for form in plugins.forms() for extra in ((), ruleset)]
    for done in (*inside, *outside):
        assert done.out
        assert "anna-private" not in done.err  # the fixture looks at the output
        assert re.search(rb"(?<![\w.:/])/(?:home|root|tmp|work|usr|var|Users)/", done.out) is None
    run("verify", desk / "none.net").refused("none.net")
    (desk / "bad.net").write_text("(export")
    done = run("verify", desk / "bad.net")
    done.refused("bad.net")
    assert "anna-private" not in done.err


# --- names -----------------------------------------------------------------------------------------------------------

EVIL = (
    "\x1b[31mR1",
    "\x1b]0;title\x07",
    "::error file=a,line=1::owned",
    "##[error]owned",
    "R1\r\n::warning::x",
    "\n::stop-commands::x",
    "\u202eR1\u2066",
    "R\u200b1",
    "=cmd|' /C calc'!A0",
    "<script>alert(1)</script>",
    "R1\u2028::error::",
    "%0A::error::",
    "a " * 90 + "::error::wrapped to the start of a line",
    "##vso[task.setvariable variable=a]owned",
)
# what programs that read a log take for a command, from memory of their sources: a start of a line, and one anywhere in it
START, COMMAND = re.compile(r"\s*(?:::|##)"), re.compile(r"\s*::|.*##[A-Za-z]*\[")


def evil_netlist() -> str:
    """A mains inlet whose live pole reaches a capacitor for each hostile part; references, values, pins and nets are hostile."""
    names = [name.replace("\\", "\\\\").replace('"', '\\"') for name in EVIL]
    parts = ['(comp (ref "J1") (value "230V inlet") (libsource (lib "Connector") (part "Inlet_C8")))']
    live = ['(node (ref "J1") (pin "1") (pinfunction "L"))']
    nets = ['(net (name "N") (node (ref "J1") (pin "2") (pinfunction "N")))']
    for at, name in enumerate(names):
        parts.append(f'(comp (ref "C{at}") (value "1n") (libsource (lib "Passive") (part "C")))')
        parts.append(f'(comp (ref "{name}") (value "{name}") (footprint "{name}") (property (name "{name}") (value "{name}")))')
        live.append(f'(node (ref "C{at}") (pin "1")) (node (ref "{name}") (pin "2"))')
        pin = f'(node (ref "{name}") (pin "{name}") (pinfunction "{name}"))'
        nets.append(f'(net (name "{name}") {pin} (node (ref "C{at}") (pin "2")))')
    return f'(export (components {" ".join(parts)}) (nets (net (name "L") {" ".join(live)}) {" ".join(nets)}))'


def test_hostile_names_are_accepted_and_neutral_in_every_form(run: Run, desk: Path) -> None:
    (desk / "evil.net").write_bytes(evil_netlist().encode())
    rows = "".join(f'"{name}","{name}","{name}"\n' for name in EVIL if not re.search(r"[\x00-\x1f]", name))
    (desk / "evil.csv").write_bytes(("Reference,Value,Description\n" + rows).encode())
    design = ("evil.net", "--bom", "evil.csv")
    outputs = {form: run("verify", *design, "--format", form, "--stop-at", "never") for form in plugins.forms()}
    outputs |= {f"barrier-{form}": run("barrier", *design, "--format", form) for form in ("text", "csv")}
    for form, done in outputs.items():
        assert done.status == 0, done.err
        text = done.out.decode()
        assert "owned" in text or form == "barrier-csv"  # the names are there, only harmless; no barrier lies on that board
        assert unsafe(text) == set()
        command = START if form == "json" else COMMAND  # JSON puts every name between quotes, never first on a line
        assert [line for line in text.splitlines() if command.match(line)] == []
        assert done.err == ""
    assert len(set(EVIL)) <= len(report_of(outputs["json"].out).parts)


def test_hostile_names_in_messages(run: Run, desk: Path) -> None:
    for name in EVIL:
        written = name.replace("\\", "\\\\").replace('"', '\\"')
        (desk / "evil.net").write_text(f'(export (components (comp (ref "{written}") (ref "x"))) (nets))')
        run("verify", "evil.net").refused("evil.net")
        (desk / "d.yaml").write_text(f"parts: {{{quoted(name)}: {{kind: {quoted(name)}, x: {quoted(name)}}}}}")
        run("verify", "small.net", "--declaration", "d.yaml").refused("d.yaml")


def test_a_saved_report_is_a_stranger_too(run: Run, desk: Path) -> None:
    (desk / "evil.net").write_bytes(evil_netlist().encode())
    (desk / "report.json").write_bytes(run("verify", "evil.net", "--format", "json").out)
    shown = run("barrier", "report.json")
    assert (shown.status, shown.out) == (0, run("barrier", "evil.net").out)
    for data, words in (
        (b"{", "not a report"),
        (b'{"a": 1}', "not a report"),
        (b'{"schema": "withstand-report/9"}', "withstand-report/9"),
        (b'{"schema": "withstand-report/1"}', "damaged"),
        (b'{"schema": "withstand-report/1", "x": ' + b"[" * 200_000, "not a report"),
        (b'{"schema": "\\u001b[31m"}', "schema"),
        ((desk / "report.json").read_bytes()[:-500], "report"),
    ):
        (desk / "report.json").write_bytes(data)
        run("barrier", "report.json").refused("report.json", words)
    run("barrier", "report.json", "--bom", "small.csv").refused("a saved report holds its inputs")


def quoted(text: str) -> str:
    """A YAML text in double quotes, everything beyond ASCII letters as escapes."""
    return '"' + "".join(c if c.isascii() and c.isalnum() else f"\\U{ord(c):08x}" for c in text) + '"'


# --- processes -------------------------------------------------------------------------------------------------------


def python(
    *arguments: str,
    environment: dict[str, str] | None = None,
    status: int | None = None,
    stdin: bytes = b"",
    stdout: int = subprocess.PIPE,
    cwd: Path | None = None,
) -> Done:
    """The command line in a process of its own."""
    code = f"import sys; sys.path.insert(0, {str(ROOT)!r}); from checker.cli import main; main()"
    kept = {key: value for key, value in os.environ.items() if key in ("PATH", "SYSTEMROOT", "HOME")}
    done = subprocess.run(
        [sys.executable, "-P", "-c", code, *arguments],
        input=stdin,
        stdout=stdout,
        stderr=subprocess.PIPE,
        env=kept | (environment or {}),
        cwd=cwd,
        timeout=60,
        check=False,
    )
    assert status is None or done.returncode == status, done.stderr.decode()
    return Done(done.returncode, done.stdout or b"", done.stderr.decode())


def test_standard_input_is_a_netlist(desk: Path) -> None:
    done = python("verify", "-", stdin=SMALL.encode())
    assert done.status in (0, 1)
    assert done.out
    assert b"standard input" in done.out
    python("verify", "-", stdin=b"").refused("standard input")
    python("verify", "-", stdin=b"(" * 20_000_000).refused("standard input")


@pytest.mark.parametrize("arguments", [["--help"], ["ruleset", "list"], ["explain", "fuse"], verify_demo(WRONG)])
def test_a_reader_that_went_away_is_no_fault(desk: Path, arguments: list[str]) -> None:
    """As in `withstand ... | head -1`, but surely: nobody reads from the start."""
    reading, writing = os.pipe()
    os.close(reading)
    try:
        done = python(*arguments, stdout=writing)
    finally:
        os.close(writing)
    assert done.err == ""
    assert done.status in (0, 1, 2)


def test_a_reader_that_takes_one_line(desk: Path) -> None:
    command = [sys.executable, "-P", "-c", f"import sys; sys.path.insert(0, {str(ROOT)!r}); from checker.cli import main; main()"]
    with subprocess.Popen(
        [*command, *verify_demo(WRONG), "--format", "json"], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as child:
        assert child.stdout is not None
        assert child.stderr is not None
        assert child.stdout.readline() == b"{\n"
        child.stdout.close()
        assert child.stderr.read() == b""


def test_a_full_disk_and_a_closed_output_are_told(desk: Path) -> None:
    if not Path("/dev/full").exists():
        pytest.skip("this system has no /dev/full")
    with open("/dev/full", "wb") as full:
        done = python(*verify_demo(WRONG), stdout=full.fileno())
    assert done.status == 2
    assert "Traceback" not in done.err
    assert done.err != ""
    script = 'exec "$@" >&-'
    code = f"import sys; sys.path.insert(0, {str(ROOT)!r}); from checker.cli import main; main()"
    closed = subprocess.run(
        ["bash", "-c", script, "-", sys.executable, "-P", "-c", code, *verify_demo(WRONG)], stderr=subprocess.PIPE, check=False
    )
    assert closed.returncode == 2
    assert b"Traceback" not in closed.stderr


PLAIN = {"LANG": "C", "LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"}


def test_a_plain_locale_changes_nothing(desk: Path) -> None:
    (desk / "evil.net").write_bytes(evil_netlist().encode())
    (desk / "\u00e4\u03a9.net").write_text("(export")
    for arguments in (verify_demo(WRONG), ["verify", "evil.net"], ["ruleset", "list"], ["--help"], ["barrier", "evil.net"]):
        plain = python(*arguments, environment=PLAIN)
        assert (plain.status, plain.out) == ((usual := python(*arguments, environment={"PYTHONUTF8": "1"})).status, usual.out)
        assert plain.err == ""
    for rule in plugins.rule_ids():
        assert python("explain", rule, environment=PLAIN, status=0).out
    python("verify", "\u00e4\u03a9.net", environment=PLAIN).refused("ends inside the form")


def test_nothing_is_imported_from_the_current_folder(desk: Path) -> None:
    """The console script, as recipes call it, in a folder that holds modules named like ours and our libraries'."""
    script = Path(sys.executable).parent / "withstand"
    if not script.is_file():
        pytest.skip("the console script is not installed beside this Python")
    for name in (
        "yaml",
        "checker",
        "lxml",
        "click",
        "sexpdata",
        "msgspec",
        "networkx",
        "json",
        "re",
        "sitecustomize",
        "usercustomize",
    ):
        (desk / f"{name}.py").write_text(f"open('RAN-{name}', 'w').close()\nraise SystemExit(99)\n")
    (desk / "withstand_plugin-1.dist-info").mkdir()
    (desk / "withstand_plugin-1.dist-info" / "METADATA").write_text("Metadata-Version: 2.1\nName: withstand-plugin\nVersion: 1\n")
    (desk / "withstand_plugin-1.dist-info" / "entry_points.txt").write_text("[withstand.rules]\nfuse = yaml:RULE\n")
    kept = {key: value for key, value in os.environ.items() if key in ("PATH", "HOME")}
    done = subprocess.run([str(script), *verify_demo()], capture_output=True, env=kept, cwd=desk, timeout=60, check=False)
    assert done.returncode == 0, done.stderr.decode()
    assert [path.name for path in desk.iterdir() if path.name.startswith("RAN-")] == []


def test_version_and_help(desk: Path) -> None:
    version = python("--version", status=0).out.decode()
    assert re.fullmatch(r"withstand \d+(?:\.\d+)*\n", version)
    assert b"verify" in python("--help", status=0).out
    assert b"iec-62368-1" in python("ruleset", "list", status=0).out
