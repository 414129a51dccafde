"""The project file: designs over declaration files over defaults, paths that stay inside, and mistakes by line."""

import hashlib
import os
from pathlib import Path

import pytest

from checker import project
from checker.errors import InputError
from checker.model.circuit import Input


@pytest.fixture
def folder(tmp_path, monkeypatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


def write(path: str, text: str) -> str:
    Path(path).parent.mkdir(parents=True, exist_ok=True)
    Path(path).write_text(text)
    return hashlib.sha256(text.encode()).hexdigest()


def design(text: str, name: str = "a") -> project.ProjectDesign:
    write("withstand.yaml", text)
    return next(item for item in project.read("withstand.yaml").designs if item.name == name)


def test_one_design_with_everything_inline(folder):
    digest = write(
        "withstand.yaml",
        "schema: withstand-project/1\n"
        "designs:\n"
        "  charger:\n"
        "    netlist: boards/charger.net\n"
        "    bom: [boards/a.csv, boards/b.csv]\n"
        "    parts: parts.yaml\n"
        "    variant: eu\n"
        "    concessions: c.yaml\n"
        "    supply: {mains: 230 V}\n"
        "    ruleset: [iec-62368-1, rules/house.yaml]\n",
    )
    found = project.read("withstand.yaml")
    (only,) = found.designs
    assert (found.path, found.folder, found.unreadable) == ("withstand.yaml", Path(), ())
    assert (only.name, only.variant, only.source.line) == ("charger", "eu", 4)
    assert (only.netlist.path, only.netlist.shown, only.netlist.source.line) == (
        Path("boards/charger.net"),
        "boards/charger.net",
        4,
    )
    assert [file.shown for file in (*only.bom, *only.parts)] == ["boards/a.csv", "boards/b.csv", "parts.yaml"]
    assert only.concessions is not None
    assert only.concessions.shown == only.declaration.concessions == "c.yaml"
    assert only.declaration.supplies[0].voltage.high == 230
    assert only.declaration.rulesets == ("iec-62368-1", "rules/house.yaml")
    assert only.inputs == (Input("project", "withstand.yaml", digest),)


def test_a_design_replaces_its_declaration_file_which_replaces_the_defaults(folder):
    digest = write("a/d.yaml", "ruleset: file\nimpulse: 2 kV\nenvironment: {ambient: 50 degC}\nparts: {U1: {kind: relay}}\n")
    found = design(
        "defaults:\n"
        "  ruleset: default\n"
        "  impulse: 1 kV\n"
        "  environment: {altitude: 3000 m}\n"
        "  unreachable: [J1]\n"
        "designs: {a: {netlist: a.net, declaration: a/d.yaml, ruleset: own}, b: {netlist: b.net}}\n"
    )
    said = found.declaration
    assert said.rulesets == ("own",)
    assert said.impulse is not None
    assert (said.impulse.high, said.impulse.source.path, said.impulse.source.line) == (2000, "a/d.yaml", 2)
    assert list(said.environment) == ["ambient"]  # keys are replaced whole, not merged further
    assert list(said.unreachable) == ["J1"]
    assert list(said.parts) == ["U1"]
    assert said.path == "a/d.yaml"
    assert found.inputs[1] == Input("declaration", "a/d.yaml", digest)
    other = project.read("withstand.yaml").designs[1].declaration
    assert (other.rulesets, list(other.environment), other.path) == (("default",), ["altitude"], "withstand.yaml")


def test_supply_and_supplies_replace_each_other(folder):
    text = (
        "defaults: {supply: {mains: 230 V}}\n"
        "designs: {a: {netlist: a.net, supplies: {x: {dc: 5 V}}}, b: {netlist: b, supply: none}}"
    )
    assert [supply.name for supply in design(text).declaration.supplies] == ["x"]
    assert design(text, "b").declaration.no_supply is not None
    with pytest.raises(InputError, match=r"withstand.yaml:1: `designs.a.supplies` stands beside `supply` \(line 1\)"):
        design("designs: {a: {netlist: a, supply: none, supplies: {x: {dc: 5 V}}}}")


def test_parts_are_files_or_declared_parts_by_their_shape(folder):
    text = (
        "defaults: {parts: common.yaml}\n"
        "designs: {a: {netlist: a, parts: {T1: {kind: relay}}}, b: {netlist: b, parts: [x.yaml, y.yaml]}}"
    )
    first, second = design(text), design(text, "b")
    assert ([file.shown for file in first.parts], list(first.declaration.parts)) == (["common.yaml"], ["T1"])
    assert ([file.shown for file in second.parts], list(second.declaration.parts)) == (["x.yaml", "y.yaml"], [])


def test_paths_are_taken_from_the_file_that_names_them(folder):
    write("sub/boards/d.yaml", "concessions: c.yaml\nruleset: [../house.yaml, iec-62368-1]\n")
    write("sub/withstand.yaml", "designs: {a: {netlist: ./boards/../a.net, declaration: boards/d.yaml}}")
    (found,) = project.read("sub/withstand.yaml").designs
    assert (found.netlist.path, found.netlist.shown) == (Path("sub/a.net"), "a.net")
    assert found.concessions is not None
    assert (found.concessions.path, found.concessions.shown) == (Path("sub/boards/c.yaml"), "boards/c.yaml")
    assert found.declaration.rulesets == ("sub/house.yaml", "iec-62368-1")


@pytest.mark.parametrize(
    "said", ["../x.net", "/etc/passwd", "a/../../x.net", "link/x.net", "out.net", "sub/../..", "{folder}/x.net", ".."]
)
@pytest.mark.parametrize("key", ["netlist", "bom", "parts", "concessions", "ruleset"])
def test_nothing_leads_outside_the_folder(folder, said, key, tmp_path_factory):
    elsewhere = tmp_path_factory.mktemp("elsewhere")
    (elsewhere / "x.net").write_text("")
    os.symlink(elsewhere, "link")
    os.symlink(elsewhere / "x.net", "out.net")
    said = said.format(folder=folder)
    text = f"designs:\n  a: {{netlist: a.net,\n {key}: {said}}}" if key != "netlist" else f"designs:\n  a:\n    netlist: {said}"
    said = f"[{said}/]" if key == "ruleset" and "/" not in said else said
    text = text if key != "ruleset" else f"designs:\n  a: {{netlist: a.net,\n ruleset: {said}}}"
    with pytest.raises(InputError) as caught:
        design(text)
    assert str(caught.value).startswith(f"withstand.yaml:3: `designs.a.{key}")
    assert "leads outside the folder of the project file" in str(caught.value)


def test_a_declaration_file_that_cannot_be_used_costs_only_its_own_design(folder):
    write("bad.yaml", "suply: none")
    write("w.yaml", "designs: {a: {netlist: a, declaration: bad.yaml}, b: {netlist: b}, c: {netlist: c, declaration: gone.yaml}}")
    found = project.read("w.yaml")
    assert [item.name for item in found.designs] == ["b"]
    assert [(name, str(error).split(".")[0]) for name, error in found.unreadable] == [("a", "bad"), ("c", "gone")]
    assert str(found.unreadable[0][1]) == "bad.yaml:1: unknown key `suply`; did you mean `supply`?"


@pytest.mark.parametrize(
    "text, message",
    [
        ("", "1: the file names no designs; expected designs: {name: {netlist: board.net}}"),
        ("designs:", "1: the file names no designs"),
        ("designs: {}", "1: the file names no designs"),
        ("designs: [a]", "1: `designs` has the wrong shape; found a list; expected a map"),
        ("designs: {a: x.net}", "1: `designs.a` has the wrong shape; found x.net"),
        ("designs:\n  a: {}", "2: `designs.a` lacks the key `netlist`; expected netlist: board.net"),
        ("designs:\n  a: {netlst: x}", "2: `designs.a` lacks the key `netlist`; is it meant by `netlst`?"),
        ("designs:\n  a:\n    netlist: x\n    suply: {}", "4: unknown key `suply` in `designs.a`; did you mean `supply`?"),
        ("designs:\n  a: {netlist: x}\n  a: {netlist: y}", "3: the key `a` is given twice (first in line 2)"),
        ("designs: {a: {netlist: [x, y]}}", "1: `designs.a.netlist` has the wrong shape; found a list; expected one text"),
        ("designs: {a: {netlist: x, bom: {}}}", "1: `designs.a.bom` has the wrong shape"),
        ("designs: {a: {netlist: x}}\ndefaults: {netlist: y}", "2: unknown key `netlist` in `defaults`"),
        ("designs: {a: {netlist: x, supply: none}}\ndefaults: {supply: 5 V}", "2: `defaults.supply` does not say what supplies"),
        ("designs: {a: {netlist: x}}\ndefault: {}", "2: unknown key `default`; did you mean `defaults`?"),
        ("designs: {a: {netlist: x, supply: {mains: 230}}}", "1: `designs.a.supply.mains` has no unit"),
        ("designs: {a: {netlist: x, declaration: ../d.yaml}}", "1: `designs.a.declaration` leads outside"),
        (
            "schema: withstand-declaration/1",
            "1: `schema` names another kind of file; found withstand-declaration/1; expected withstand-project/1",
        ),
        ("designs: {a: &x {netlist: x}, b: *x}", "1: `&x` names a value for reuse (an anchor)"),
    ],
)
def test_mistakes_are_told_with_their_line(folder, text, message):
    with pytest.raises(InputError) as caught:
        design(text)
    assert str(caught.value).startswith(f"withstand.yaml:{message}")


def test_the_number_of_designs_is_bounded(folder, monkeypatch):
    monkeypatch.setattr(project.limits, "DESIGNS", 1)
    with pytest.raises(InputError, match=r"`designs` holds too many designs; found 2; expected at most 1"):
        design("designs: {a: {netlist: x}, b: {netlist: y}}")


def test_a_missing_project_file(folder):
    with pytest.raises(InputError, match=r"withstand\.yaml: there is no such file"):
        project.read("withstand.yaml")
