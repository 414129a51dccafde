"""The JSON report and the report for a person, on a hand-made report and on made-up ones."""

from __future__ import annotations

import csv
import io
import json
import math
import re
from decimal import Decimal

import msgspec
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from report_sample import REPORT, STEPS, VERDICTS, verdict

from checker import limits
from checker.errors import InputError
from checker.files import Blob
from checker.formulas.rounding import significant
from checker.model.report import (
    BarrierShown,
    Consequence,
    Evidence,
    Figure,
    LimitShown,
    MissingFact,
    Report,
    Reports,
    Unreadable,
)
from checker.neutral import neutral
from checker.writers import barriers, derivation, text
from checker.writers import csv as csv_writer
from checker.writers import json as json_writer
from checker.writers.page import Page

SEVERAL = Reports(
    reports=[REPORT, msgspec.structs.replace(REPORT, design="second", verdicts=[], summary={})],
    unreadable=[Unreadable(design="third", message="there is no such file")],
    summary={"pass": 3, "fail": 3, "open": 2},
)


def with_verdicts(*verdicts, **more) -> Report:
    return msgspec.structs.replace(REPORT, verdicts=list(verdicts), **more)


def read(data: bytes):
    return json_writer.read(Blob("r.json", data))


# rounding


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_six_significant_digits_as_the_decimal_module_rounds(value):
    expected = float(f"{Decimal(value):.5e}")  # decimal: the exact value of the float, correctly rounded
    assert significant(value) == expected
    assert significant(significant(value)) == significant(value)


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_a_figure_that_is_not_finite_is_refused(value):
    with pytest.raises(ValueError, match="finite"):
        significant(value)


def test_minus_zero_is_zero():
    assert math.copysign(1, significant(-0.0)) == 1


# JSON


@pytest.mark.parametrize("report", [REPORT, SEVERAL], ids=["one", "several"])
def test_a_report_reads_back_equal_once_it_is_rounded(report):
    once = read(json_writer.write(report))
    assert read(json_writer.write(once)) == once
    assert json_writer.write(once) == json_writer.write(report)
    if report is REPORT:
        found = once.verdicts[1]
        assert found.margin == -0.0441176
        assert msgspec.structs.replace(once.verdicts[1], margin=VERDICTS[1].margin) == VERDICTS[1]


def test_the_layout_of_the_json_is_that_of_the_standard_library():
    data = json_writer.write(REPORT)
    tree = json.loads(data)
    assert data.decode().replace("1e-9", "1e-09") == json.dumps(tree, indent=2, ensure_ascii=False) + "\n"
    assert list(tree)[:4] == ["schema", "design", "variant", "tool"]
    assert tree["schema"] == "withstand-report/1"
    assert tree["verdicts"][3]["missing"]["then"][1] == {"if": "no isolator", "outcome": "fail"}
    assert tree["verdicts"][0]["found"] == {"text": "X2"}
    assert tree["variant"] is None


texts = st.text(st.characters(codec="utf-8"), max_size=12)
figures = st.floats(allow_nan=False, allow_infinity=False).map(significant)


@st.composite
def reports(draw):
    figure = st.builds(Figure, value=figures, unit=texts, form=texts) | st.builds(Figure, text=texts)
    limit = st.none() | st.builds(LimitShown, value=figures, unit=texts, form=texts, bound=texts, status=texts)
    missing = st.none() | st.builds(
        MissingFact,
        part=st.none() | texts,
        fact=texts,
        supply_as=texts,
        then=st.lists(st.builds(Consequence, answer=texts, outcome=texts), max_size=2),
    )
    place = st.builds(Evidence, path=texts, line=st.integers(0, 9), column=st.integers(0, 9), cell=st.none() | texts, text=texts)
    verdicts = st.builds(
        verdict,
        texts,
        st.sampled_from(["pass", "fail", "open", "not-applicable", "odd"]),
        st.lists(texts, max_size=3),
        what=texts,
        level=st.sampled_from(["error", "warning", "note", "odd"]),
        nets=st.lists(texts, max_size=3),
        found=st.none() | figure,
        limit=limit,
        margin=st.none() | figures,
        missing=missing,
        evidence=st.lists(place, max_size=2),
        step=st.none() | st.sampled_from(["s1", "s4", "s9"]),
        fingerprint=texts,
        conceded=st.none() | st.dictionaries(texts, texts | figures | st.lists(texts, max_size=2), max_size=2),
    )
    return with_verdicts(*draw(st.lists(verdicts, max_size=4)), design=draw(texts), notes=draw(st.lists(texts, max_size=2)))


@settings(max_examples=150, deadline=None)
@given(reports())
def test_made_up_reports_read_back_equal_and_are_harmless_in_both_forms(report):
    data = json_writer.write(report)
    once = read(data)
    assert once.verdicts == report.verdicts
    assert (once.design, once.notes) == (report.design, report.notes)
    for line in data.decode().splitlines() + text.write(report, 60).split("\n"):
        assert neutral(line, limit=10**6) == line
    assert read(json_writer.write(once)) == once


@pytest.mark.parametrize("value", [math.nan, math.inf])
@pytest.mark.parametrize("field", ["margin", "found", "stress", "free"])
def test_no_report_holds_a_figure_that_is_not_finite(value, field):
    if field == "stress":
        report = msgspec.structs.replace(REPORT, stress=[msgspec.structs.replace(REPORT.stress[0], surely=value)])
    elif field == "free":
        report = msgspec.structs.replace(
            REPORT, barriers=[msgspec.structs.replace(REPORT.barriers[0], required=[{"electric_strength": {"dc": value}}])]
        )
    else:
        bad = {"margin": value} if field == "margin" else {"found": Figure(value=value, unit="V", form="")}
        report = with_verdicts(verdict("fuse", "fail", ["F1"], **bad))
    with pytest.raises(ValueError, match="finite"):
        json_writer.write(report)


def test_writing_leaves_the_report_as_it_was():
    free = {"electric_strength": {"dc": 1.23456789}, "more": [2.3456789]}
    report = msgspec.structs.replace(REPORT, barriers=[msgspec.structs.replace(REPORT.barriers[0], required=[free])])
    assert b"1.23457" in json_writer.write(report)
    assert free == {"electric_strength": {"dc": 1.23456789}, "more": [2.3456789]}


def test_unknown_keys_are_ignored():
    tree = json.loads(json_writer.write(REPORT))
    tree["later"] = {"x": [1]}
    tree["verdicts"][0]["later"] = 3
    assert read(json.dumps(tree).encode()) == read(json_writer.write(REPORT))


def damaged(change) -> bytes:
    tree = json.loads(json_writer.write(REPORT))
    change(tree)
    return json.dumps(tree).encode()


@pytest.mark.parametrize(
    "data, says",
    [
        (b"", "this is not a report"),
        (b"(export (version E))", "this is not a report"),
        (b"\xff\xfe{}", "this is not a report"),
        (b"[1]", "this is not a report"),
        (b"{}", "JSON without a schema"),
        (b'{"schema": 3}', "this is not a report"),
        (b'{"schema": "withstand-report/2"}', "schema withstand-report/2"),
        (b'{"schema": "withstand-report/1"}', "damaged"),
        (b'{"schema": "withstand-report/1", "x": ' + b"[" * 100_000, "r.json"),
        (json_writer.write(REPORT)[:-40], "r.json"),
        (damaged(lambda tree: tree.pop("verdicts")), "verdicts"),
        (damaged(lambda tree: tree["verdicts"][0].update(margin="much")), "margin"),
        (damaged(lambda tree: tree["summary"].update({"pass": "3"})), "summary"),
    ],
)
def test_what_is_no_report_is_refused_with_a_reason(data, says):
    with pytest.raises(InputError) as error:
        read(data)
    assert says in str(error.value)
    assert str(error.value).startswith("r.json: ")


def test_a_free_part_of_a_report_is_bounded_in_depth():
    def nest(tree):
        for _ in range(limits.DEPTH + 1):
            tree["barriers"][0]["required"] = [{"x": tree["barriers"][0]["required"]}]

    with pytest.raises(InputError, match="nested too deep"):
        read(damaged(nest))


def test_a_report_inside_several_must_be_of_the_same_schema():
    tree = json.loads(json_writer.write(SEVERAL))
    tree["reports"][1]["schema"] = "withstand-report/9"
    with pytest.raises(InputError, match="withstand-report/9"):
        read(json.dumps(tree).encode())


def test_characters_that_reorder_text_stand_escaped_in_the_json_and_read_back():
    name = "R1\u202e\x9b\x7f\u2028\U000e0041 \u00b5F"
    data = json_writer.write(msgspec.structs.replace(REPORT, design=name))
    assert read(data).design == name
    assert neutral(data.decode().replace("\n", ""), limit=10**9) == data.decode().replace("\n", "")
    assert "\u00b5F" in data.decode()


def test_a_lone_surrogate_of_a_path_does_not_stop_the_report():
    report = msgspec.structs.replace(REPORT, design="a\udcff")
    assert read(json_writer.write(report)).design == "a\\udcff"
    assert text.WRITER.write(report).startswith(b"Design a\\udcff: ")


# text


def section(said: str, title: str) -> list[str]:
    """The lines of a section, up to the next line that is all capitals."""
    lines = said.splitlines()
    rest = lines[lines.index(title) + 1 :]
    end = next(
        (at for at, line in enumerate(rest) if re.fullmatch(r"[A-Z][A-Z ,:]+", line) or line.startswith("Caution")), len(rest)
    )
    return rest[:end]


def test_the_first_line_says_the_design_and_the_counts_in_words():
    first = text.write(REPORT, 140).splitlines()[0]
    assert first == "Design flyback-5w: 3 failed, 2 open, 3 passed, 1 not applicable; 1 passed on a limit that is not verified"


def test_a_failed_verdict_says_where_what_numbers_clause_why_and_remedy():
    lines = section(text.write(REPORT), "FAILED")
    assert lines[:14] == [
        "",
        "Part C7",
        "  error    A capacitor of class X2 bridges reinforced insulation.",
        "  where    nets PGND, SGND; bom.csv:14 D14, board.net:212",
        "  found    X2; needed Y1, or Y2+Y2 in series; limit partly verified",
        "  clause   IEC 62368-1:2018 G.11 (5.5.2.1) (iec-62368-1/bridging-capacitor)",
        "  why      Between mains and the unearthed output VOUT insulation must be reinforced, and X2 is no",
        "           class that insulates.",
        "           - Mains against an unearthed secondary asks for reinforced. [table needed-grade]",
        "           - PGND belongs to mains: F1 and the bridge D1 lead to the inlet.",
        "  remedy   Use a Y1 capacitor of 1 nF for C7; with it this clause and the touch current pass.",
        f"  explain  {VERDICTS[0].fingerprint[:8]}",
        "",
        "  warning  The steady voltage uses more of the rating than the house allows.",
    ]
    assert "  found    355 V peak; allowed at most 340 V peak; margin -4.4 %; limit partly verified" in lines
    assert "           - Allowed voltage. ratio * rated = 340 V peak [derating-commercial]" in lines


def test_verdicts_of_one_part_stand_under_one_heading_and_errors_come_first():
    warning = verdict("fuse", "fail", ["F1"], level="warning", what="Late.")
    error = verdict("fuse", "fail", ["Q1"], what="First.")
    again = verdict("records", "fail", ["F1"], level="note", what="Last.")
    lines = section(text.write(with_verdicts(warning, again, error)), "FAILED")
    assert [line for line in lines if line.startswith(("Part", "  error", "  warning", "  note"))] == [
        "Part Q1",
        "  error    First.",
        "Part F1",
        "  warning  Late.",
        "  note     Last.",
    ]


OPEN = "OPEN: NOT PROVEN, AND WHAT WOULD SETTLE IT"


def test_an_open_verdict_says_what_settles_it_and_where_each_answer_leads():
    assert section(text.write(REPORT), OPEN)[7:] == [
        "           if no isolator -> fail",
        f"  explain  {VERDICTS[3].fingerprint[:8]}",
        "",
        "Part F1",
        "  warning  The rated voltage of the fuse in the line is not given.",
        "           settled by: rated voltage (BOM column Voltage)",
        "           if 250 V or more -> pass",
        "           if less than 240 V -> fail",
        f"  explain  {VERDICTS[4].fingerprint[:8]}",
        "",
    ]


def test_several_questions_about_one_part_stand_under_one_heading_and_each_counts():
    asked = [verdict(rule, "open", ["T1"], what=f"{rule}?") for rule in ("creepage", "clearance")]
    other = verdict("fuse", "open", ["F1"], what="fuse?")
    report = with_verdicts(asked[0], other, asked[1], summary={"fail": 0, "open": 3, "pass": 0})
    said = text.write(report)
    assert said.splitlines()[0] == "Design flyback-5w: 0 failed, 3 open, 0 passed"
    shown = [line for line in section(said, OPEN) if line.startswith(("Part", "  error"))]
    assert shown == ["Part T1", "  error    creepage?", "  error    clearance?", "Part F1", "  error    fuse?"]


def test_passes_and_what_does_not_apply_are_one_line_a_rule():
    said = text.write(REPORT)
    assert section(said, "PASSED")[:2] == [
        "  barrier-insulation  2: T1, U1 (1 on a limit not verified)",
        "  hazardous-source    1: J1",
    ]
    assert section(said, "DOES NOT APPLY")[0] == "  protective-earth  1: the whole design"


def test_assumptions_notes_inputs_rulesets_plugins_and_the_caution_are_told():
    said = text.write(REPORT)
    assert section(said, "ASSUMED, BECAUSE NOBODY SAID")[0] == "  supply.tolerance              10 %: No tolerance is declared."
    assert section(said, "NOTED")[0] == "  -  board.net: two nets called SGND were joined"
    assert section(said, "READ")[0] == "  netlist  board.net (sha256 abababababab)"
    assert section(said, "JUDGED BY")[:4] == [
        "  iec-62368-1          edition 2018, revision 1, 5 figures not fully verified (sha256 121212121212)",
        "  derating-commercial  revision 1, every figure verified (sha256 343434343434)",
        "  plugin               withstand-example 1.0",
        "  program              withstand 0.1.0",
    ]
    assert " ".join(said.split()).endswith(" ".join(("Caution:", *REPORT.caution.split())))


def test_more_than_twenty_of_a_kind_are_counted_not_listed():
    many = [verdict("fuse", outcome, [f"F{n}"], what=f"W{n}.") for outcome in ("fail", "open") for n in range(23)]
    said = text.write(with_verdicts(*many, notes=[f"n{n}" for n in range(21)]))
    assert section(said, "FAILED")[-2] == "  and 3 more (see --format json)"
    assert len([line for line in section(said, "FAILED") if line.startswith("Part F")]) == 20
    assert "  and 1 more (see --format json)" in section(said, "NOTED")


def test_long_lists_of_parts_and_places_are_cut():
    many = verdict(
        "fuse",
        "fail",
        [f"F{n}" for n in range(12)],
        nets=[f"N{n}" for n in range(9)],
        evidence=[Evidence(path="b.net", line=n, column=0, cell=None, text="") for n in (1, 1, 2, 3, 4)],
    )
    lines = section(text.write(with_verdicts(many)), "FAILED")
    assert lines[1] == "Parts F0, F1, F2, F3, F4, F5, F6, F7 and 4 more"
    assert lines[2] == "  where    nets N0, N1, N2, N3, N4, N5, N6, N7 and 1 more; b.net:1, b.net:2, b.net:3 and 1 more"


def test_conceded_and_vanished_verdicts_are_not_among_the_failures():
    conceded = verdict("fuse", "fail", ["F1"], what="Old.", conceded={"by": "A. N. Other", "expires": "2027-01-01"})
    absent = verdict("fuse", "fail", ["F2"], what="Gone.", state="absent")
    new = verdict("fuse", "fail", ["F3"], what="New.", state="new")
    said = text.write(with_verdicts(conceded, absent, new))
    assert [line for line in section(said, "FAILED") if line.startswith("Part")] == ["Part F3"]
    assert f"  explain  {new.fingerprint[:8]} (new)" in said
    assert "  conceded by A. N. Other; expires 2027-01-01" in section(said, "FAILED, WITH A CONCESSION")
    assert section(said, "GONE SINCE THE BASELINE")[0] == "  fuse  F2: Gone."


def test_several_designs_end_with_one_summary():
    said = text.write(SEVERAL)
    assert [line for line in said.splitlines() if line.startswith(("Design", "Not judged", "3 designs"))] == [
        text.write(REPORT).splitlines()[0],
        "Design second: 0 failed, 0 open, 0 passed",
        "Not judged: third: there is no such file",
        "3 designs: 3 failed, 2 open, 3 passed, 1 not judged",
    ]
    assert said.count("Caution:") == 1


def test_circular_and_missing_steps_do_not_stop_the_report():
    circle = [msgspec.structs.replace(STEPS[0], inputs=["s2"]), msgspec.structs.replace(STEPS[1], text="", inputs=["s1", "s8"])]
    said = text.write(with_verdicts(verdict("fuse", "fail", ["F1"], step="s2"), steps=circle))
    assert [line for line in said.splitlines() if line.startswith("           -")] == [f"           - {STEPS[0].text}"]


HOSTILE = (
    "::error::x",
    "a\n::error::x",
    "##[group]x",
    "##vso[task.x]y",
    "x\r\x1b[2K",
    "\u202eevil",
    "A" * 300,
    "\u00a0::set x",
    "word " * 60,
)


@pytest.mark.parametrize("name", HOSTILE)
@pytest.mark.parametrize("width", [60, 71, 100])
def test_a_hostile_name_never_becomes_a_command_of_a_log(name, width):
    """The two forms a CI log obeys: `::` after leading white space, and `##[`/`##word[` anywhere in a line."""
    strings = {"because": name, "what": name, "citation": name, "condition": name, "remedy": name, "fingerprint": name}
    one = verdict(
        name, "fail", [name, name], nets=[name], evidence=[Evidence(path=name, line=1, column=1, cell=name, text=name)], **strings
    )
    gap = MissingFact(part=name, fact=name, supply_as=name, then=[Consequence(answer=name, outcome=name)])
    report = with_verdicts(
        one,
        verdict(name, "open", [name], missing=gap, **strings),
        verdict(name, "pass", [name]),
        verdict(name, "fail", [], level=name, clause=name, candidate=name, conceded={name: name}, state=name),
        design=name,
        variant=name,
        notes=[name],
        plugins=[name],
        caution=name,
        inputs=[msgspec.structs.replace(REPORT.inputs[0], role=name, path=name)],
        assumptions=[msgspec.structs.replace(REPORT.assumptions[0], key=name, value=name)],
    )
    several = Reports(reports=[report], unreadable=[Unreadable(design=name, message=name)], summary={}, caution=name)
    for said in (text.write(report, width), text.write(several, width), csv_writer.write(several).decode()):
        for line in said.split("\n"):
            assert not line.strip().startswith("::")
            assert not re.search(r"##[A-Za-z]*\[", line)
            assert neutral(line, limit=10**6) == line


@pytest.mark.parametrize("width", [20, 60, 80, 140])
def test_no_line_is_wider_than_asked(width):
    for line in text.write(REPORT, width).splitlines():
        assert len(line) <= max(width, 60)


def test_every_word_of_a_long_text_is_kept():
    words = [f"w{n}" for n in range(150)]
    page = Page(60)
    page.put(" ".join(words), "label", 2, 11)
    assert page.text().split() == ["label", *words]
    assert all(line.startswith("  label    w0 " if at == 0 else "           w") for at, line in enumerate(page.lines))


def test_a_barrier_without_figures_is_written_and_read():
    bare = BarrierShown(
        id="a|b", between=["a", "b"], grade="", bridged_by=[], chains=[], working_voltage=None, required=[], parts=[]
    )  # fmt: skip
    report = msgspec.structs.replace(REPORT, separations=[bare])
    assert read(json_writer.write(report)).separations == [bare]


# CSV


def rows(data: bytes) -> list[dict[str, str]]:
    """The rows by heading; every row has as many cells as the header."""
    header, *found = list(csv.reader(io.StringIO(data.decode(), newline=""), strict=True))
    assert {len(row) for row in found} <= {len(header)}
    return [dict(zip(header, row, strict=True)) for row in found]


def test_the_header_of_the_verdicts_is_the_contract():
    assert csv_writer.write(REPORT).decode().split("\n")[0] == (
        "design,outcome,level,hazard,rule,clause,citation,parts,nets,what,found,found_unit,found_form,limit,limit_unit,limit_form,"
        "bound,margin,missing,because,remedy,path,line,fingerprint"
    )


def test_a_row_a_verdict_in_the_order_of_the_report():
    found = rows(csv_writer.write(REPORT))
    assert [(row["rule"], row["outcome"]) for row in found] == [(shown.rule, shown.outcome) for shown in VERDICTS]
    words, figures, asked = found[0], found[1], found[3]
    assert (words["found"], words["found_unit"], words["limit"], words["bound"]) == ("X2", "", "Y1, or Y2+Y2 in series", "")
    assert (words["nets"], words["path"], words["line"]) == ("PGND, SGND", "bom.csv", "14")
    assert words["fingerprint"] == VERDICTS[0].fingerprint
    assert [figures[name] for name in ("found", "found_unit", "found_form", "limit", "bound", "margin")] == [
        "355", "V", "peak", "340", "at-most", "-0.0441176",
    ]  # fmt: skip
    assert asked["missing"].startswith("whether U3 insulates, and its isolation rating (kind and ratings")


def test_a_design_that_could_not_be_read_is_a_row():
    found = rows(csv_writer.write(SEVERAL))
    assert len(found) == len(VERDICTS) + 1
    assert {name: cell for name, cell in found[-1].items() if cell} == {
        "design": "third", "outcome": "unreadable", "what": "there is no such file",
    }  # fmt: skip


def test_lines_end_with_lf_alone():
    for data in (csv_writer.write(REPORT), csv_writer.spacing(REPORT)):
        assert b"\r" not in data
        assert data.endswith(b"\n")


FORMULAS = (
    "=cmd|' /C calc'!A0",
    "+12V",
    "-5V",
    "@SUM(A1)",
    "\t=1+1",
    " =1+1",
    '"=1+1',
    "a;=1+1",
    "a; +1",
    "\uff1d1+1",
    'a"b,c\nd=e',
    "\r\n=1+1",
    "\x00=1",
)


@pytest.mark.parametrize("name", FORMULAS)
def test_no_cell_is_a_formula_and_none_breaks_its_row(name):
    one = verdict(name, "fail", [name, "R1"], nets=[name], what=name, because=name, found=Figure(text=name))
    bridge = msgspec.structs.replace(REPORT.barriers[0].parts[0], part=name, sides=[[name], ["2"]])
    barrier = msgspec.structs.replace(
        REPORT.barriers[0], id=f"{name}|x", between=[name, "x"], parts=[bridge], required=[{"ruleset": name, "missing": [name]}]
    )
    report = with_verdicts(one, design=name, barriers=[barrier], separations=[], environment={"material_group": name})
    for data in (csv_writer.write(report), csv_writer.spacing(report)):
        text = data.decode()
        assert neutral(text.replace("\n", ""), limit=10**6) == text.replace("\n", "")
        for row in rows(data):
            for shown in row.values():
                assert not re.search(r"(^|;)[\s'\"]*(?<!')[=+\-@\uff1d]", shown), shown
    assert len(rows(csv_writer.write(report))) == 1
    assert len(rows(csv_writer.spacing(report))) == 3  # the separation, and the part for each of its two rulesets


def test_figures_stay_figures():
    report = with_verdicts(verdict("fuse", "fail", ["F1"], found=Figure(value=-1.23456789e-7, unit="A", form=""), margin=-1.5))
    found = rows(csv_writer.write(report))[0]
    assert (found["found"], found["margin"]) == ("-1.23457e-07", "-1.5")


def test_the_spacing_table_has_separations_and_parts_with_what_they_need():
    data = csv_writer.spacing(REPORT)
    assert data.decode().split("\n")[0] == (
        "design,separation,between_1,between_2,part,pins,grade,working_rms_V,working_peak_V,clearance_mm,creepage_mm,"
        "through_insulation_mm,strength_peak_V,bounded,pollution_degree,material_group,altitude_m,ruleset,because"
    )
    both, coupler, house, poles, apart = rows(data)
    assert (both["separation"], both["part"], both["working_rms_V"], both["clearance_mm"]) == ("mains|VOUT", "", "370", "3")
    assert (both["strength_peak_V"], both["bounded"], both["ruleset"]) == ("4000", "true", "iec-62368-1")
    assert (both["pollution_degree"], both["material_group"], both["altitude_m"]) == ("2", "IIIb", "2000")
    assert (coupler["part"], coupler["pins"], coupler["creepage_mm"], coupler["bounded"]) == ("U1", "1 | 3", "4.8", "false")
    assert coupler["because"].endswith("more may be needed, settled by the working voltage between DRAIN and SGND")
    assert (coupler["through_insulation_mm"], coupler["ruleset"]) == ("", "iec-62368-1")  # zero: nothing is known to be needed
    assert (house["ruleset"], house["strength_peak_V"]) == ("house", "8485.28")  # 6 kV r.m.s.
    assert (poles["separation"], poles["part"], poles["creepage_mm"]) == ("live|neutral", "", "2.5")
    assert (apart["separation"], apart["ruleset"], apart["bounded"], apart["creepage_mm"]) == ("mains|earth", "", "", "")


# barriers


def test_needs_and_statements_stand_side_by_side():
    lines = barriers.write(REPORT).splitlines()
    start = lines.index("Barrier mains | VOUT: reinforced")
    assert lines[start + 1 : start + 13] == [
        "  because  Mains against an unearthed secondary asks for reinforced.",
        "  voltage  370 V rms, 510 V peak",
        "",
        "                 clearance    creepage         through ins.  test",
        "  between the two sides",
        "    iec-62368-1  3 mm                                        2.828 kV rms",
        "  U1: part; pins 1 | 3; 240 V rms",
        "    stated       2.5 mm open  not stated       not stated    5 kV SHORT",
        "    iec-62368-1  2 to 3 mm    at least 4.8 mm  not bounded",
        "    house                                                    5.5 to 6 kV rms",
        "  open: settled by the working voltage between DRAIN and SGND",
        "  explain  mains|VOUT",
    ]
    start = lines.index("Further separations for the layout: no part lies across them")
    assert lines[start + 2 : start + 6] == [
        "                 creepage",
        "  live | neutral: basic; 240 V rms, 339.4 V peak (line to line before the fuse)",
        "    iec-62368-1  2.5 mm",
        "  mains | earth: basic; not bounded (nothing lies between them)",
    ]


def column_of_tests(form: str, volts: float, asked: dict[str, float]) -> list[str]:
    """The cells of the test column, statement and need, of a part that states this test voltage."""
    rating = Figure(value=volts, unit="V", form=form)
    part = msgspec.structs.replace(REPORT.parts[0], ref="U1", kind="optocoupler", value=None, ratings={"isolation_test": rating})
    bridge = msgspec.structs.replace(
        REPORT.barriers[0].parts[0], provided={"isolation_test": volts}, required=[{"ruleset": "r", "electric_strength": asked}]
    )
    barrier = msgspec.structs.replace(REPORT.barriers[0], parts=[bridge], required=[])
    lines = barriers.write(msgspec.structs.replace(REPORT, parts=[part], barriers=[barrier], separations=[])).splitlines()
    start = next(at for at, line in enumerate(lines) if line.startswith("  U1: optocoupler"))
    return [line.split(maxsplit=1)[1] for line in lines[start + 1 : start + 3]]


@pytest.mark.parametrize(
    ("form", "volts", "asked", "shown"),
    [
        ("rms", 3000.0, {"dc": 4000.0, "rms": 2828.0}, ["3 kV rms", "2.828 kV rms"]),
        ("rms", 2500.0, {"dc": 4000.0}, ["2.5 kV rms SHORT", "2.828 kV rms"]),
        ("dc", 3000.0, {"dc": 4000.0, "rms": 2828.0}, ["3 kV dc SHORT", "4 kV dc"]),
        ("peak", 4000.0, {"rms": 2000.0}, ["4 kV peak", "2.828 kV dc"]),
        ("", 3000.0, {"dc": 4000.0, "rms": 2828.0}, ["3 kV", "2.828 kV rms"]),
        ("", 2500.0, {"dc": 4000.0, "rms": 2828.0}, ["2.5 kV SHORT", "2.828 kV rms"]),
    ],
)
def test_a_test_voltage_is_compared_in_the_form_it_is_stated_in(form, volts, asked, shown):
    assert column_of_tests(form, volts, asked) == shown


@pytest.mark.parametrize("width", [20, 60, 80, 100, 140])
def test_no_line_of_the_barriers_is_wider_than_asked(width):
    for line in barriers.write(REPORT, width).splitlines():
        assert len(line) <= max(width, 60)


def test_a_page_too_narrow_for_the_columns_says_the_same_in_lines():
    wide, narrow = (barriers.write(REPORT, width) for width in (100, 60))
    assert "    house: test 5.5 to 6 kV rms" in narrow.splitlines()
    for said in ("clearance 2.5 mm open", "creepage not stated", "at least 4.8 mm", "not bounded"):
        assert said in " ".join(narrow.split())
    assert sorted(set(wide.split()) - set(narrow.replace(",", "").replace(":", "").split()) - set(narrow.split())) == []


@pytest.mark.parametrize("name", HOSTILE)
@pytest.mark.parametrize("width", [60, 100])
def test_a_hostile_name_is_harmless_among_the_barriers(name, width):
    bridge = msgspec.structs.replace(
        REPORT.barriers[0].parts[0], part=name, sides=[[name], [name]], how=name, required=[{"ruleset": name, "clearance": 3.0}]
    )
    barrier = msgspec.structs.replace(
        REPORT.barriers[0], id=name, between=[name, name], grade=name, reason=name, chains=[[name, name]], parts=[bridge],
        required=[{"ruleset": name, "clearance": 3.0, "unbounded": ["clearance"], "missing": [name], "step": "s1"}],
    )  # fmt: skip
    report = msgspec.structs.replace(REPORT, design=name, barriers=[barrier], separations=[barrier])
    for said in (barriers.write(report, width), derivation.barrier(report, barrier, width)):
        for line in said.split("\n"):
            assert not line.strip().startswith("::")
            assert not re.search(r"##[A-Za-z]*\[", line)
            assert neutral(line, limit=10**6) == line


def test_every_figure_of_a_barrier_leads_to_its_clause():
    said = derivation.barrier(REPORT, REPORT.barriers[0])
    assert [line for line in said.splitlines() if line and not line.startswith((" ", "Caution"))] == [
        "Separation mains | VOUT: reinforced (barrier)",
        "Grade",
        "Working voltage",
        "Needed by iec-62368-1",
        "U1: needed by iec-62368-1",
    ]
    assert "[ratio * rated] = 340 V peak (derating-commercial)" in said
