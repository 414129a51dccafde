"""The doors: built-in and installed objects, clashes, and what is refused. The example package goes through them whole."""

from __future__ import annotations

import subprocess
import sys
import tomllib
import types
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Annotated

import pytest

from checker import plugins, rulesets
from checker.errors import ArgumentError, InputError, PluginError
from checker.files import Blob
from checker.model.candidate import Candidate, Mark
from checker.model.circuit import Design
from checker.model.clause import Clause
from checker.model.declaration import Declaration
from checker.model.domain import Crossing, Isolation
from checker.model.fact import Fact
from checker.model.reading import Reader, Reading
from checker.model.rule import Analysis, Rule, Setting
from checker.model.step import Step
from checker.parameters import AtMost
from checker.plugins import Entry
from checker.writers.door import Writer

ROOT = Path(__file__).resolve().parents[1]
EXAMPLE = ROOT / "fixtures" / "plugin"
PINS = b"pin-list 1\n# a comment\nL: J1.1 F1.1\nFUSED: F1.2 T1.1\nN: J1.2 T1.2\n"


@dataclass(frozen=True, slots=True)
class Params:
    current: Annotated[float, AtMost("A", "rms")] = 0.0005


def _ask(analysis, clause):
    return iter(())


GOOD_RULE = Rule("house-rule", "shock", Params, _ask, "What it asks.")
GOOD_READER = Reader("house form", "netlist", lambda head: head.startswith("house"), lambda blob: Reading("netlist", "", "", ""))
GOOD_WRITER = Writer("house-form", lambda report: b"")


@pytest.fixture(autouse=True)
def _fresh():
    plugins.forget()
    yield
    plugins.forget()


@pytest.fixture
def install(monkeypatch):
    """Puts objects behind a door, as packages would: install(door, name, object, package)."""
    entries: list[Entry] = []
    monkeypatch.setattr(plugins, "_installed", _remembered(lambda: tuple(entries)))

    def put(door: str, name: str, found: object, package: str = "house 1.0") -> None:
        module = types.ModuleType(f"fake_plugin_{len(entries)}")
        module.OBJECT = found
        monkeypatch.setitem(sys.modules, module.__name__, module)
        entries.append(Entry(door, name, f"{module.__name__}:OBJECT", package))

    return put


def _remembered(function):
    function.cache_clear = lambda: None
    return function


@pytest.fixture
def example(monkeypatch, tmp_path):
    """The example package as an installer would leave it: its folder on the path and its entry points in a dist-info."""
    stated = tomllib.loads((EXAMPLE / "pyproject.toml").read_text())["project"]
    info = tmp_path / "withstand_example-1.0.dist-info"
    info.mkdir()
    info.joinpath("METADATA").write_text(f"Metadata-Version: 2.1\nName: {stated['name']}\nVersion: {stated['version']}\n")
    lines = [f"[{group}]\n" + "\n".join(f"{n} = {t}" for n, t in names.items()) for group, names in stated["entry-points"].items()]
    info.joinpath("entry_points.txt").write_text("\n".join(lines) + "\n")
    monkeypatch.syspath_prepend(str(tmp_path))
    monkeypatch.syspath_prepend(str(EXAMPLE))
    yield
    for name in [name for name in sys.modules if name.startswith("withstand_example")]:
        monkeypatch.delitem(sys.modules, name)


def test_the_example_package_is_found_by_its_name_and_version(example):
    assert plugins.plugin_names() == ("withstand-example 1.0",)


def test_the_example_reader_is_chosen_by_content_and_reads(example):
    reader = plugins.reader_for(Blob("board.txt", PINS), "netlist")
    reading = reader.read(Blob("board.txt", PINS))
    assert reader.form == "pin list"
    assert [(net.name, [(node.ref, node.pin) for node in net.nodes]) for net in reading.nets] == [
        ("L", [("J1", "1"), ("F1", "1")]),
        ("FUSED", [("F1", "2"), ("T1", "1")]),
        ("N", [("J1", "2"), ("T1", "2")]),
    ]
    assert [(part.ref, [pin.number for pin in part.pins]) for part in reading.parts] == [
        ("J1", ["1", "2"]),
        ("F1", ["1", "2"]),
        ("T1", ["1", "2"]),
    ]
    with pytest.raises(InputError, match=r"board.txt:2: this is no pin; found J11; expected REF.PIN"):
        reader.read(Blob("board.txt", b"pin-list 1\nL: J11\n"))


def test_the_example_ruleset_uses_the_example_rule(example):
    ruleset = rulesets.load("house-records")
    clause = ruleset.clauses[0]
    assert (ruleset.path, clause.rule, clause.hazard, clause.level) == (
        "withstand-example 1.0/house-records.yaml",
        "record-number",
        "record",
        "warning",
    )
    assert clause.params.marks == ("IEC 60747-5-5", "IEC 61558-2-16")


def test_the_example_rule_passes_with_a_record_and_is_open_without(example):
    clause = rulesets.load("house-records").clauses[0]
    step = Step("U1 and U2 stand between the sides.")
    crossings = tuple(Crossing(u, "insulating", ("mains", "out"), (("1",), ("3",)), (u,), True, step) for u in ("U1", "U2"))
    fact = Fact("mark", "IEC 60747-5-5")
    choice = {
        "U1": Candidate("optocoupler", marks=(Mark("IEC 60747-5-5", fact, record="4711"),)),
        "U2": Candidate("optocoupler", marks=(Mark("IEC 60747-5-5", fact),)),
    }
    analysis = Analysis(
        design=Design("board", {}, {}),
        declaration=Declaration(),
        identity={},
        choice=choice,
        isolation=Isolation({}, {}, crossings),
        setting=Setting(None, (), "", None, ()),
        grades={},
    )
    verdicts = list(plugins.rule("record-number").ask(analysis, clause))
    assert [(v.parts, v.outcome, v.clause) for v in verdicts] == [
        (("U1",), "pass", "house-records/HB-7"),
        (("U2",), "open", "house-records/HB-7"),
    ]
    assert verdicts[0].because == "U1 is marked IEC 60747-5-5, record 4711."
    assert verdicts[1].missing.supply_as == "marks with a record in a parts file"


def test_an_installed_rule_stands_beside_the_built_in_ones(install):
    install("rules", "house-rule", GOOD_RULE)
    assert plugins.rule("house-rule") is GOOD_RULE
    assert plugins.rule_ids() == (*plugins.BUILT_IN["rules"], "house-rule")


def test_an_unknown_rule_and_an_unknown_form_get_a_suggestion(install):
    with pytest.raises(ArgumentError, match=r"there is no rule hazardous-sorce; did you mean `hazardous-source`\?"):
        plugins.rule("hazardous-sorce")
    with pytest.raises(ArgumentError, match=r"there is no output form jsn; did you mean `json`\?"):
        plugins.writer("jsn")


@pytest.mark.parametrize(
    "door, built_in, found", [("rules", "fuse", replace(GOOD_RULE, id="fuse")), ("writers", "json", Writer("json", len))]
)
def test_a_plugin_that_takes_a_built_in_name_stops_the_run(install, door, built_in, found):
    install(door, built_in, found)
    with pytest.raises(PluginError) as error:
        plugins.rule_ids() if door == "rules" else plugins.forms()
    assert "withstand (built in)" in str(error.value)
    assert "house 1.0" in str(error.value)


def test_two_plugins_of_one_name_are_both_named(install):
    install("rules", "house-rule", GOOD_RULE, "one 1.0")
    install("rules", "house-rule", GOOD_RULE, "other 2.0")
    with pytest.raises(PluginError, match=r"two rules are called house-rule: one of one 1.0 and one of other 2.0"):
        plugins.rule("house-rule")


def test_two_readers_that_claim_one_file_are_both_named(install, monkeypatch):
    monkeypatch.setitem(plugins.BUILT_IN, "readers", {})
    install("readers", "house", GOOD_READER, "one 1.0")
    install("readers", "other", replace(GOOD_READER, claims=lambda head: "house" in head), "other 2.0")
    with pytest.raises(PluginError, match=r"b is claimed by reader house of one 1.0 and reader other of other 2.0"):
        plugins.reader_for(Blob("b", b"house"), "netlist")
    assert plugins.reader_for(Blob("b", b"a house"), "netlist").form == "house form"


def test_content_that_nobody_claims_names_what_it_is_and_what_is_read(install, monkeypatch):
    monkeypatch.setitem(plugins.BUILT_IN, "readers", {})
    install("readers", "house", GOOD_READER)
    with pytest.raises(InputError) as error:
        plugins.reader_for(Blob("a.net", b"%PDF-1.7"), "netlist")
    assert error.value.found == "a PDF document"
    assert error.value.expected == "house form"


def test_a_reader_of_another_role_is_not_asked(install, monkeypatch):
    monkeypatch.setitem(plugins.BUILT_IN, "readers", {})
    install("readers", "house", replace(GOOD_READER, role="bom"))
    assert plugins.readers("netlist") == ()
    with pytest.raises(InputError):
        plugins.reader_for(Blob("b", b"house"), "netlist")


def test_a_reader_that_raises_when_asked_is_named(install, monkeypatch):
    monkeypatch.setitem(plugins.BUILT_IN, "readers", {})
    install("readers", "house", replace(GOOD_READER, claims=lambda head: head[10_000]))
    with pytest.raises(PluginError, match=r"reader house of house 1.0 raised IndexError"):
        plugins.reader_for(Blob("b", b"house"), "netlist")


@dataclass(slots=True)
class Thawed:
    current: Annotated[float, AtMost("A", "rms")] = 0.0005


@dataclass(frozen=True, slots=True)
class Untyped:
    current: float = 0.0005


@dataclass(frozen=True, slots=True)
class NoDefault:
    current: Annotated[float, AtMost("A", "rms")]


@dataclass(frozen=True, slots=True)
class WrongDefault:
    current: Annotated[float, AtMost("A", "rms")] = "0.5 mA"  # type: ignore[assignment]


@pytest.mark.parametrize(
    "found, complaint",
    [
        ("text", "it is a str, not a checker.model.rule.Rule"),
        (replace(GOOD_RULE, id="other"), "its id is 'other', but the entry is called 'house-rule'"),
        (replace(GOOD_RULE, hazard="noise"), "its hazard is 'noise', not one of shock, fire, overstress, record"),
        (replace(GOOD_RULE, manual=" \n"), "it has no manual"),
        (replace(GOOD_RULE, manual=None), "it has no manual"),
        (replace(GOOD_RULE, ask=3), "ask must be a function"),
        (replace(GOOD_RULE, params=dict), "its params are not a dataclass"),
        (replace(GOOD_RULE, params=Thawed), "its params are not a frozen dataclass"),
        (replace(GOOD_RULE, params=Untyped), "its parameter current has no type of checker.parameters"),
        (replace(GOOD_RULE, params=NoDefault), "its parameter current has no default"),
        (replace(GOOD_RULE, params=WrongDefault), "the default '0.5 mA' of its parameter current is no AtMost"),
    ],
)
def test_a_rule_of_the_wrong_shape_is_refused_with_its_package(install, found, complaint):
    install("rules", "house-rule", found)
    with pytest.raises(PluginError) as error:
        plugins.rule("house-rule")
    assert str(error.value).startswith("rule house-rule of house 1.0: ")
    assert complaint in str(error.value)


@pytest.mark.parametrize(
    "found, complaint",
    [
        (GOOD_RULE, "it is a Rule, not a checker.model.reading.Reader"),
        (replace(GOOD_READER, form=""), "it names no form"),
        (replace(GOOD_READER, role="layout"), "its role is 'layout', not one of netlist, bom, parts"),
        (replace(GOOD_READER, read=None), "claims and read must be functions"),
    ],
)
def test_a_reader_of_the_wrong_shape_is_refused(install, monkeypatch, found, complaint):
    monkeypatch.setitem(plugins.BUILT_IN, "readers", {})
    install("readers", "house", found)
    with pytest.raises(PluginError) as error:
        plugins.readers("netlist")
    assert complaint in str(error.value)


@pytest.mark.parametrize(
    "found, complaint",
    [
        (len, "it is a builtin_function_or_method, not a checker.writers.door.Writer"),
        (Writer("other", len), "its form is 'other', but the entry is called 'house-form'"),
        (Writer("house-form", None), "write must be a function"),
    ],
)
def test_a_writer_of_the_wrong_shape_is_refused(install, found, complaint):
    install("writers", "house-form", found)
    with pytest.raises(PluginError) as error:
        plugins.writer("house-form")
    assert complaint in str(error.value)


def test_a_good_writer_is_found(install):
    install("writers", "house-form", GOOD_WRITER)
    assert plugins.writer("house-form") is GOOD_WRITER
    assert plugins.forms() == (*plugins.BUILT_IN["writers"], "house-form")


@pytest.mark.parametrize("found", [(), ("a.yaml",), (Path("b.yaml"),), (Path("house.txt"),), [Path("house.yaml")]])
def test_rulesets_of_the_wrong_shape_are_refused(install, found):
    install("rulesets", "house", found)
    with pytest.raises(PluginError, match=r"ruleset house of house 1.0"):
        plugins.ruleset_files()


def test_a_plugin_that_cannot_be_imported_is_named(monkeypatch):
    broken = Entry("rules", "house-rule", "no_such_module_at_all:RULE", "house 1.0")
    monkeypatch.setattr(plugins, "_installed", _remembered(lambda: (broken,)))
    with pytest.raises(PluginError, match=r"rule house-rule of house 1.0 cannot be loaded: ModuleNotFoundError"):
        plugins.rule("house-rule")


def test_a_name_that_is_no_name_is_refused_without_an_import(monkeypatch):
    hostile = Entry("rules", "evil\n::error::", "no_such_module_at_all:RULE", "house\x1b[31m 1.0")
    monkeypatch.setattr(plugins, "_installed", _remembered(lambda: (hostile,)))
    with pytest.raises(PluginError, match="a name is made of words") as error:
        plugins.rule("evil\n::error::")
    assert "\n" not in str(error.value)
    assert "\x1b" not in str(error.value)


def _built_in(door):
    """The built-in entries whose module stands in the folder."""
    for name, target in plugins.BUILT_IN[door].items():
        if (ROOT / (target.split(":")[0].replace(".", "/") + ".py")).exists():
            yield name


@pytest.mark.parametrize("door", ["readers", "rules", "writers"])
def test_built_in_objects_pass_the_same_validation(door):
    names = list(_built_in(door))
    if not names:
        pytest.skip(f"no built-in {door} in this checkout")
    for name in names:
        assert plugins._loaded(plugins._entries(door)[name]) is not None


def test_nothing_behind_a_door_is_loaded_before_it_is_used():
    code = (
        "import sys; import checker.plugins; "
        "print([m for m in ('lxml', 'sexpdata', 'networkx', 'pint', 'importlib.metadata') if m in sys.modules], "
        "[m for m in sys.modules if m.startswith(('checker.rules.', 'checker.readers.')) and m != 'checker.readers.sniff'])"
    )
    run = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert run.stdout == "[] []\n"


def test_a_clause_of_an_installed_rule_is_typed(install, tmp_path):
    install("rules", "house-rule", GOOD_RULE)
    path = tmp_path / "house.yaml"
    path.write_text(
        "schema: withstand-ruleset/1\nid: house\nsources: {HB: {title: Handbook}}\n"
        "clauses: [{id: A, rule: house-rule, level: error, params: {current: 0.25 mA rms}, cites: [HB 1]}]\n"
    )
    clause = rulesets.load(str(path)).clauses[0]
    assert isinstance(clause, Clause)
    assert clause.params == Params(current=0.00025)
