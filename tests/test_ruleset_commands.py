"""`withstand ruleset show` and `validate`."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from checker import cli, rulesets
from checker.writers import rulesets as shown

GROUND = """\
schema: withstand-ruleset/1
id: ground
edition: "1"
revision: "7"
title: Ground layer
sources: {S: {title: A source}}
tables:
  creepage-s:
    columns: {voltage: V rms, note: text, basic: mm}
    lookup: interpolate
    round: up to 0.1 mm
    source: S table 3
    verified: true
    rows:
      - [250, first, 2.5]
      - [320, null, 3.2]
clauses:
  - id: touch
    rule: reachable-connector
    level: error
    mandatory: true
    when: {protection_class: [I, II]}
    params: {dc: 50 V dc}
    cites: S 5.2
    verified: true
  - id: rating
    rule: capacitor-voltage
    level: warning
    cites: [S 7, S 8]
"""
HOUSE = """\
schema: withstand-ruleset/1
id: house
revision: "2"
based_on: ground.yaml
change:
  ground/rating: {params: {film: 0.9}, because: field returns}
"""


@pytest.fixture
def desk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    (tmp_path / "ground.yaml").write_text(GROUND)
    (tmp_path / "house.yaml").write_text(HOUSE)
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.fixture
def run(capsysbinary: pytest.CaptureFixture[bytes]):
    def call(*arguments: str) -> tuple[int, str, str]:
        status = cli.run(["ruleset", *arguments])
        out, err = capsysbinary.readouterr()
        return status, out.decode(), err.decode()

    return call


def block(said: str, title: str) -> list[str]:
    """The lines below a title, up to the next empty one."""
    lines = said.splitlines()
    rest = lines[lines.index(title) + 1 :]
    return rest[: rest.index("")]


def test_show_prints_layers_clauses_and_tables(run, desk):
    status, said, err = run("show", "house.yaml")
    assert (status, err) == (0, "")
    head = said.splitlines()
    assert head[0] == "Ruleset house, revision 2: without a title"
    assert head[1] == "  holds      2 clauses, 1 table, 1 figure not fully verified"
    assert re.fullmatch(r"  layer 1    ground:1, revision 7, ground\.yaml \(sha256 [0-9a-f]{12}\)", head[2])
    assert re.fullmatch(r"  layer 2    house, revision 2, house\.yaml \(sha256 [0-9a-f]{12}\)", head[3])
    assert block(said, "Clause house/touch") == [
        "  rule       reachable-connector (shock)",
        "  level      error, mandatory: a layer above can only tighten it",
        "  when       protection_class I or II",
        "  parameter  dc 50 V dc (set in ground.yaml:18)",
        "  parameter  rms 30 V rms (default of the rule)",
        "  parameter  peak 42.4 V peak (default of the rule)",
        "  cites      S 5.2 (read in the source)",
        "  set in     ground.yaml:18",
    ]
    rating = block(said, "Clause house/rating")
    assert "  parameter  film 0.9 (set in house.yaml:6)" in rating
    assert "  loosens    params.film 0.8 -> 0.9, looser than ground:1" in rating
    assert "  cites      S 7; S 8; changed by house: field returns (not read in a source)" in rating
    assert rating[-1] == "  set in     house.yaml:6"
    lines = said.splitlines()
    at = lines.index("Table creepage-s")
    assert lines[at + 1 : at + 9] == [
        "  lookup     interpolate, rounded up to 0.1 mm",
        "  source     S table 3 (read in the source)",
        "  set in     ground.yaml:8",
        "",
        "    voltage  note   basic",
        "    V rms    text   mm",
        "    250      first  2.5",
        "    320      -      3.2",
    ]


def test_show_of_one_clause_takes_its_name_in_both_forms(run, desk):
    for asked in ("rating", "house/rating"):
        status, said, _ = run("show", "house.yaml", "--clause", asked)
        assert status == 0
        assert [line for line in said.splitlines() if line.startswith(("Clause", "Table"))] == ["Clause house/rating"]
    status, said, err = run("show", "house.yaml", "--clause", "ratings")
    assert (status, said) == (2, "")
    assert "the ruleset house has no clause ratings; did you mean `rating`?" in err


def test_every_shipped_ruleset_is_shown_at_every_width_and_valid(run):
    for info in rulesets.available():
        name = f"{info.name}:{info.edition}" if info.edition else info.name
        layers = rulesets.load_layers(name)
        for width in (60, 100, 140):
            said = shown.write(layers, width=width)
            assert max(map(len, said.splitlines())) <= width
            assert said.count("\nClause ") == info.clauses
        status, out, err = run("validate", name)
        assert (status, err) == (0, "")
        assert out.startswith(f"{name}: valid, {info.clauses} clauses, ")
        assert out.endswith(f"{info.unverified} figures not fully verified\n")


def test_a_table_too_wide_for_the_page_is_shown_in_lines(desk):
    wide = GROUND.replace("note: text", "a note with a long name: text").replace("first", "a long remark " * 5)
    (desk / "ground.yaml").write_text(wide)
    said = shown.write(rulesets.load_layers("ground.yaml"), width=60)
    assert "    - voltage 250; a note with a long name a long remark a" in said
    assert max(map(len, said.splitlines())) <= 60


def test_validate_says_what_is_valid_and_goes_on_after_an_error(run, desk):
    (desk / "bad.yaml").write_text(GROUND.replace("[320, null, 3.2]", "[320, null, 2.2]"))
    (desk / "worse.yaml").write_text(GROUND.replace("rule: capacitor-voltage", "rule: capacitor-volts"))
    status, said, err = run("validate", "bad.yaml", "worse.yaml", "none.yaml", "house.yaml")
    assert status == 2
    assert said == "house.yaml: valid, 2 clauses, 1 table, 1 figure not fully verified\n"
    falls, rule, absent = err.splitlines()
    assert falls == (
        "withstand: bad.yaml:8: the column basic of the table creepage-s falls while the voltage rises; found 2.2 mm at 320 V "
        "after 2.5 mm at 250 V; expected distances that rise or stay. Compare the two rows with the source."
    )
    assert rule.startswith("withstand: worse.yaml:27: ")
    assert "did you mean `capacitor-voltage`?" in rule
    assert absent.startswith("withstand: none.yaml: there is no such file")


@pytest.mark.parametrize(
    ("old", "new", "line"),
    [
        ("[320, null, 3.2]", "[240, null, 3.2]", 16),
        ("lookup: interpolate", "lookup: guess", 10),
        ("dc: 50 V dc", "dc: 50 A dc", 23),
        ("cites: S 5.2", "cites: T 5.2", 24),
    ],
)
def test_errors_name_file_and_line(run, desk, old, new, line):
    (desk / "ground.yaml").write_text(GROUND.replace(old, new))
    for name in ("ground.yaml", "house.yaml"):  # a fault of the layer below stops the one above
        status, said, err = run("validate", name)
        assert (status, said) == (2, "")
        assert err.startswith(f"withstand: ground.yaml:{line}: ")


def test_hostile_names_and_rulesets_are_shown_neutral(run, desk):
    for evil in ("\x1b[31m.yaml", "::error::x.yaml", "a\nb.yaml"):
        for command in ("show", "validate"):
            status, said, err = run(command, evil)
            assert (status, said) == (2, "")
            assert err.count("\n") == 1
            assert "\x1b" not in err
    text = GROUND.replace("Ground layer", '"::error::x \\u001b[31m ##[group]"').replace("first", '"##[x]"')
    (desk / "ground.yaml").write_text(text)
    status, said, _ = run("show", "ground.yaml")
    assert status == 0
    assert "\x1b" not in said
    assert not [line for line in said.splitlines() if line.strip().startswith("::") or "##[" in line]
    evil = "::error::x.yaml"
    os.rename("ground.yaml", evil)
    status, said, _ = run("validate", evil)
    assert status == 0
    assert not said.startswith("::")
