"""The trial designs are what their descriptions say, and their hand-written answers agree with a plain flood over the
described symbols.

The flood knows from symbols.txt which pins of a real part conduct to one another (how such parts are built: common
practice, no source); it shares nothing with the program. Files are read back with sexpdata and lxml, general-purpose libraries.
"""

from __future__ import annotations

import csv
from pathlib import Path

import pytest
import sexpdata
import yaml
from lxml import etree

from tests.trial_circuits import Part, Trial, folders, read
from tests.trial_sources import files

FOLDERS = folders()
KEYS = {"barrier_parts", "asked", "domains", "sides", "fails", "source", "note", "domains_without_short"}


class _Text(sexpdata.Parser):
    """Keeps every bare atom as text."""

    def atom(self, token: str) -> str:
        return token


def _child(form: list[object], word: str) -> list[object]:
    return next((one for one in form if isinstance(one, list) and one and one[0] == word), [word])


def _written(folder: Path) -> tuple[dict[str, str], list[tuple[str, str, str]]]:
    """References with their values, and (net, reference, pin) of every node, out of the committed file."""
    if (folder / "board.xml").exists():
        root = etree.parse(str(folder / "board.xml")).getroot()
        parts = {comp.get("ref"): comp.findtext("value") or "" for comp in root.find("components")}
        return parts, [(net.get("name"), node.get("ref"), node.get("pin")) for net in root.find("nets") for node in net]
    text = (folder / "board.net").read_text("utf-8")
    tree = _Text(text, nil=None, true=None).parse()[0]
    comps = [one for one in _child(tree, "components")[1:] if isinstance(one, list)]
    parts = {str(_child(comp, "ref")[1]): str(_child(comp, "value")[1]) for comp in comps}
    nodes = []
    for net in _child(tree, "nets")[1:]:
        ends = [one for one in net if isinstance(one, list) and one[0] == "node"]
        nodes += [(str(_child(net, "name")[1]), str(_child(end, "ref")[1]), str(_child(end, "pin")[1])) for end in ends]
    return parts, nodes


def _find(parents: dict[str, str], net: str) -> str:
    while parents[net] != net:
        parents[net] = parents[parents[net]]
        net = parents[net]
    return net


def _islands(trial: Trial, without: frozenset[str] = frozenset()) -> dict[str, str]:
    """Net -> island: what conducts direct current, capacitors, connectors and unfitted parts left out."""
    parents = {net: net for net in trial.nets()}
    for part in trial.parts:
        if part.symbol.capacitor or not part.fitted or part.ref in without:
            continue
        for group in part.symbol.groups:
            joined = [part.nets[pin] for pin in group if pin in part.nets]
            for net in joined[1:]:
                parents[_find(parents, net)] = _find(parents, joined[0])
    return {net: _find(parents, net) for net in parents}


def _links(trial: Trial) -> set[str]:
    """Nets that only capacitors touch: the middle of a chain."""
    return {net for net, nodes in trial.nets().items() if all(part.symbol.capacitor for part, _ in nodes) and len(nodes) > 1}


def _reached(trial: Trial, part: Part, start: str, links: set[str], islands: dict[str, str]) -> set[str]:
    """Islands at one end of a capacitor, through links."""
    seen, todo, found = {start}, [(start, part)], set()
    while todo:
        net, came = todo.pop()
        if net not in links:
            found.add(islands[net])
            continue
        for other, _ in trial.nets()[net]:
            if other is not came and other.fitted:
                for further in set(other.nets.values()) - seen:
                    seen.add(further)
                    todo.append((further, other))
    return found


def _counts(trial: Trial, nets: list[str]) -> bool:
    return any(len({part.ref for part, _ in trial.nets()[net]}) > 1 for net in nets)


def _crossing(trial: Trial, without: frozenset[str]) -> set[str]:
    """Parts with insulation between two islands, capacitors and chains included."""
    islands, links, found = _islands(trial, without), _links(trial), set()
    for part in trial.parts:
        if not part.fitted:
            continue
        if part.symbol.capacitor:
            ends = [_reached(trial, part, net, links, islands) for net in part.nets.values()]
            if len(ends) == 2 and ends[0] and ends[1] and len(ends[0] | ends[1]) > 1:
                found.add(part.ref)
        else:
            sides = [[part.nets[pin] for pin in group if pin in part.nets] for group in part.symbol.groups]
            if len({islands[nets[0]] for nets in sides if nets and _counts(trial, nets)}) > 1:
                found.add(part.ref)
    return found


def _shorts(trial: Trial) -> frozenset[str]:
    return frozenset(part for fail in trial.answers["fails"] if fail["family"] == "short" for part in fail["parts"])


@pytest.fixture(params=FOLDERS, ids=lambda folder: folder.name)
def folder(request: pytest.FixtureRequest) -> Path:
    return request.param


def test_there_are_at_least_22_designs() -> None:
    assert len(FOLDERS) >= 22


def test_committed_files_are_the_generated_ones(folder: Path) -> None:
    wanted = files(read(folder))
    present = {path.name: path.read_bytes() for path in folder.iterdir() if path.name not in ("circuit.txt", "declaration.yaml")}
    assert sorted(present) == sorted(wanted)
    assert [name for name, data in wanted.items() if present[name] != data] == []


def test_no_reference_or_pin_twice(folder: Path) -> None:
    trial = read(folder)
    refs = [part.ref for part in trial.parts]
    assert sorted(refs) == sorted(set(refs))
    _, nodes = _written(folder)
    pins = [(ref, pin) for _, ref, pin in nodes]
    assert sorted(pins) == sorted(set(pins))


def test_file_read_back_says_what_the_description_says(folder: Path) -> None:
    trial = read(folder)
    parts, nodes = _written(folder)
    assert parts == {part.ref: part.value for part in trial.parts}
    described = {(part.ref, pin): net for part in trial.parts for pin, net in part.nets.items()}
    assert {(ref, pin): net for net, ref, pin in nodes if (ref, pin) in described} == described
    loose = [(net, ref, pin) for net, ref, pin in nodes if (ref, pin) not in described]
    assert all(sum(net == other for other, _, _ in nodes) == 1 for net, _, _ in loose)
    assert len(nodes) == sum(len(part.symbol.pins) for part in trial.parts)


def test_every_net_has_two_ends_or_is_meant_to_be_open(folder: Path) -> None:
    """A net the description names once is a slip of the pen, unless its one pin is a connector's or a spare part's."""
    trial = read(folder)
    loose = set(trial.header.get("loose", "").split())
    nodes = [ends[0] for ends in trial.nets().values() if len(ends) == 1]
    assert [f"{part.ref}.{pin}" for part, pin in nodes if part.symbol.groups and part.ref not in loose] == []


def test_answers_name_only_what_exists(folder: Path) -> None:
    trial = read(folder)
    answers, refs, nets = trial.answers, {part.ref for part in trial.parts}, set(trial.nets())
    assert set(answers) <= KEYS
    assert set(answers) >= KEYS - {"domains_without_short"}
    named = set(answers["barrier_parts"]) | set(answers["asked"]) | {part for fail in answers["fails"] for part in fail["parts"]}
    assert named - refs == set()
    listed = [net for key in ("domains", "domains_without_short") for domain in answers.get(key, []) for net in domain]
    assert (set(listed) | set(answers["sides"])) - nets == set()
    assert set(answers["sides"].values()) <= {"primary", "secondary", "earth"}
    assert answers["source"] in ("recognised", "question", "none")


def test_listed_domains_are_islands_of_the_flood(folder: Path) -> None:
    trial = read(folder)
    for key, without in (("domains", frozenset()), ("domains_without_short", _shorts(trial))):
        islands = _islands(trial, without)
        domains = trial.answers.get(key, [])
        found = [{islands[net] for net in domain} for domain in domains]
        assert [sorted(domain) for domain, ones in zip(domains, found, strict=True) if len(ones) > 1] == []
        assert len(set().union(*found)) == len(found)


def test_barrier_parts_are_those_between_islands(folder: Path) -> None:
    trial = read(folder)
    assert sorted(_crossing(trial, _shorts(trial))) == sorted(trial.answers["barrier_parts"])


def test_a_side_holds_for_a_whole_island(folder: Path) -> None:
    trial = read(folder)
    islands = _islands(trial, _shorts(trial))
    sides: dict[str, set[str]] = {}
    for net, side in trial.answers["sides"].items():
        sides.setdefault(islands[net], set()).add(side)
    assert [sorted(names) for names in sides.values() if len(names) > 1] == []


def test_bom_rows_are_rectangular_and_carry_references(folder: Path) -> None:
    name = next((one for one in ("bom.csv", "bom.tsv") if (folder / one).exists()), None)
    trial = read(folder)
    if name is None:
        assert "bom" not in trial.header
        return
    data = (folder / name).read_bytes()
    text = data.decode("utf-16" if data[:2] == b"\xff\xfe" else "utf-8-sig")
    words = trial.header["bom"].split()
    rows = list(
        csv.reader(text.splitlines(), delimiter="\t" if "tab" in words else ";" if "semicolon" in words else ",", strict=True)
    )
    table = rows[5 if "preamble" in words else 0 :]
    assert len({len(row) for row in table}) == 1
    heading = next(part.rsplit("=", 1)[0].strip() for part in trial.header["columns"].split(" | ") if part.endswith("=refs"))
    cells = [row[table[0].index(heading)] for row in table[1:]]
    assert len(cells) > 5
    first = {cell.replace(",", " ").split()[0].split("-")[0] for cell in cells}
    assert first <= {part.ref for part in trial.parts}


def test_declarations_are_yaml_mappings() -> None:
    declared = [folder / "declaration.yaml" for folder in FOLDERS if (folder / "declaration.yaml").exists()]
    assert declared
    for path in declared:
        assert isinstance(yaml.safe_load(path.read_text("utf-8")), dict)
