"""Writes a trial design as a netlist: S-expression form in four layouts, or its XML twin.

One neutral tree of (keyword, content) nodes is built, then laid out. Content is a text, a (name, text) field, or a list of nodes.
"""

from __future__ import annotations

import hashlib
import re
import uuid
from xml.sax.saxutils import escape, quoteattr

from tests.trial_circuits import Part, Trial, natural

Node = tuple[str, object]
_BARE = re.compile(r'[^\s()"]+\Z')
_BROKEN = set("export design components comp fields libparts libpart pins nets net sheet units title_block".split())
_FIRST_LINE = {"export": 1, "comp": 1, "libpart": 2, "net": 2, "sheet": 3}
_ATTRIBUTES = {
    "export": ("version",),
    "sheet": ("number", "name", "tstamps"),
    "comp": ("ref",),
    "libsource": ("lib", "part", "description"),
    "property": ("name", "value"),
    "sheetpath": ("names", "tstamps"),
    "libpart": ("lib", "part"),
    "pin": ("num", "name", "type"),
    "net": ("code", "name", "class"),
    "node": ("ref", "pin", "pinfunction", "pintype"),
}


def _pin_type(name: str) -> str:
    if re.fullmatch(r"[+]?V(CC|DD|IN|BUS|O|OUT|I)?[0-9A-Z]*|GND[0-9]*|IN", name, re.IGNORECASE):
        return "power_in"
    return "passive" if len(name) < 3 or name.startswith("Pin_") else "bidirectional"


def _component(part: Part, trial: Trial, version: str) -> Node:
    form, flag = trial.header["form"], trial.header.get("flag", "none")
    fields = {key: text for key, text in part.keys.items() if key[:1].isupper()}
    marker, equals, word = flag.partition("=")
    if equals and not part.fitted:
        fields[marker] = word
    children: list[Node] = [("ref", part.ref), ("value", part.value)]
    if part.footprint:
        children.append(("footprint", part.footprint))
    if version == "D":
        children.append(("datasheet", "~"))
    if fields:
        children.append(("fields", [("field", (key, text)) for key, text in fields.items()]))
    children.append(
        ("libsource", [("lib", part.symbol.library), ("part", part.library_part), ("description", part.symbol.description)])
    )
    if version == "E":
        shown = (fields if form == "Etabs" else {}) | {"Sheetname": "Root", "Sheetfile": "board.sch"}
        children += [("property", [("name", key), ("value", text)]) for key, text in shown.items()]
        if flag == "property" and not part.fitted:
            children.append(("property", [("name", "dnp")]))
    children.append(("sheetpath", [("names", "/"), ("tstamps", "/")]))
    identity = hashlib.sha256(f"{trial.name}/{part.ref}".encode()).hexdigest()
    children.append(("tstamp", identity[:8].upper()) if version == "D" else ("tstamps", str(uuid.UUID(identity[:32]))))
    if form == "Etabs":
        pins: list[Node] = [("pin", [("num", number)]) for number, _ in part.symbol.pins]
        children.append(("units", [("unit", [("name", "A"), ("pins", pins)])]))
    return ("comp", children)


def _libpart(part: Part, version: str) -> Node:
    unnamed = "~" if version == "D" else ""
    prefix = re.match(r"[A-Za-z]+", part.ref)
    children: list[Node] = [("lib", part.symbol.library), ("part", part.library_part)]
    if part.symbol.description:
        children.append(("description", part.symbol.description))
    fields: list[Node] = [("field", ("Reference", prefix[0] if prefix else "U")), ("field", ("Value", part.library_part))]
    children += [("docs", "~"), ("fields", fields)]
    pins: list[Node] = [
        ("pin", [("num", num), ("name", name or unnamed), ("type", _pin_type(name))]) for num, name in part.symbol.pins
    ]
    return ("libpart", children + ([("pins", pins)] if pins else []))


def _net(code: int, name: str, nodes: list[tuple[Part, str]], form: str) -> Node:
    children: list[Node] = [("code", str(code)), ("name", name)]
    if form == "Etabs":
        children.append(("class", "Power,Default" if re.match(r"\+|GND|V", name) else "Default"))
    for part, pin in nodes:
        node: list[Node] = [("ref", part.ref), ("pin", pin)]
        if not form.startswith("D"):
            label = dict(part.symbol.pins)[pin]
            node += [("pinfunction", label)] if label else []
            node.append(("pintype", _pin_type(label) + ("+no_connect" if name.startswith("unconnected-(") else "")))
        children.append(("node", node))
    return ("net", children)


def _all_nets(trial: Trial, version: str) -> dict[str, list[tuple[Part, str]]]:
    """The described nets, then one net for every pin that is in none."""
    nets = trial.nets()
    for part in trial.parts:
        for number, label in part.symbol.pins:
            if number not in part.nets:
                tail = f"{label.replace('/', '{slash}')}-Pad{number}" if label else f"Pad{number}"
                nets[f"Net-({part.ref}-Pad{number})" if version == "D" else f"unconnected-({part.ref}-{tail})"] = [(part, number)]
    return nets


def tree(trial: Trial) -> Node:
    """The whole netlist as a neutral tree."""
    form = trial.header["form"]
    version = "D" if form.startswith("D") else "E"
    nets = _all_nets(trial, version)
    order = sorted(nets) if form == "Etabs" else list(nets)
    parts = sorted(trial.parts, key=lambda part: natural(part.ref)) if version == "E" else trial.parts
    block: list[Node] = [("title", trial.header["title"]), ("rev", "1.2"), ("source", "board.sch")]
    sheet: list[Node] = [("number", "1"), ("name", "/"), ("tstamps", "/"), ("title_block", block)]
    design: list[Node] = [("source", "board.sch"), ("date", "2024-03-11"), ("tool", "schematic editor"), ("sheet", sheet)]
    children: list[Node] = [
        ("version", version),
        ("design", design),
        ("components", [_component(one, trial, version) for one in parts]),
    ]
    if form == "Etabs":
        children += [("groups", []), ("variants", [])]
    shapes = {(part.symbol.library, part.library_part): part for part in trial.parts}
    shown = shapes.values() if trial.header.get("libparts", "yes") == "yes" else ()
    children.append(("libparts", [_libpart(part, version) for part in shown]))
    children.append(("nets", [_net(at, name, nets[name], form) for at, name in enumerate(order, 1)]))
    return ("export", children)


def _atom(text: str, quoted: bool) -> str:
    if not quoted and _BARE.match(text):
        return text
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _flat(node: Node, quoted: bool) -> str:
    word, content = node
    if isinstance(content, str):
        return f"({word} {_atom(content, quoted)})"
    if isinstance(content, tuple):
        return f"({word} (name {_atom(content[0], quoted)}) {_atom(content[1], quoted)})"
    assert isinstance(content, list)
    return f"({' '.join([word, *(_flat(one, quoted) for one in content)])})"


def _sexpr(node: Node, form: str, depth: int = 0) -> str:
    """Two-space layout, or in the newest one TABs, one child a line and the closing bracket alone."""
    word, content = node
    newest = form == "Etabs"
    if not isinstance(content, list) or not content or not (newest or word in _BROKEN):
        return _flat(node, form != "D")
    step = "\t" if newest else "  "
    inline = 0 if newest else _FIRST_LINE.get(word, 0)
    first = "".join(" " + _flat(one, form != "D") for one in content[:inline])
    rest = "".join(f"\n{step * (depth + 1)}{_sexpr(one, form, depth + 1)}" for one in content[inline:])
    return f"({word}{first}{rest}" + (f"\n{step * depth})" if newest else ")")


def _xml(node: Node, depth: int = 0) -> str:
    """One-atom children become attributes where the XML form has them."""
    word, content = node
    pad = "  " * depth
    if isinstance(content, str):
        return f"{pad}<{word}>{escape(content)}</{word}>\n" if content else f"{pad}<{word}/>\n"
    if isinstance(content, tuple):
        return f"{pad}<{word} name={quoteattr(content[0])}>{escape(content[1])}</{word}>\n"
    assert isinstance(content, list)
    inside = [child for child in content if child[0] in _ATTRIBUTES.get(word, ()) and isinstance(child[1], str)]
    head = f"{pad}<{word}" + "".join(f" {key}={quoteattr(text)}" for key, text in inside)
    rest = "".join(_xml(child, depth + 1) for child in content if child not in inside)
    return f"{head}>\n{rest}{pad}</{word}>\n" if rest else f"{head}/>\n"


def netlist(trial: Trial) -> tuple[str, bytes]:
    """File name and bytes of the netlist."""
    form = trial.header["form"]
    if form == "X":
        return "board.xml", ('<?xml version="1.0" encoding="UTF-8"?>\n' + _xml(tree(trial))).encode()
    return "board.net", (_sexpr(tree(trial), form) + "\n").encode()
