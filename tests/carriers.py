"""One circuit written in every form a netlist comes in. The circuit is a `Trial` of tests/trial_circuits.py.

What a form cannot carry (measured by tests/test_carriers.py):

    form                          values  footprints  symbols    pin names  left out  places
    S-expression, XML, EDIF       yes     yes         yes        yes        yes       no
    legacy parenthesised          yes     yes         name only  no         in value  no
    lines, IPC-D-356A             no      no          no         no         no        IPC only

What is missing must come from a bill of materials: `values` writes one.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from dataclasses import replace

from tests import demo_source
from tests.trial_circuits import Part, Symbol, Trial
from tests.trial_netlists import netlist


def sexpr(trial: Trial, layout: str = "E") -> bytes:
    """The S-expression in one of the layouts D, Dq, E, Etabs."""
    return netlist(replace(trial, header=trial.header | {"form": layout}))[1]


def xml(trial: Trial) -> bytes:
    """The XML twin."""
    return sexpr(trial, "X")


def legacy_list(trial: Trial) -> bytes:
    """The legacy parenthesised list; pins in no net are on `?`."""
    lines = ["# Editor Netlist Version 1.1 created  Sun 25 Mar 2012 03:44:49 PM UTC", "("]
    for at, part in enumerate(trial.parts):
        value = part.value if part.fitted else f"DNP {part.value}"
        lines.append(f" ( /4EDE{at:04X} {part.footprint or '$noname'} {part.ref} {value} {{Lib={part.library_part}}}")
        lines += [f"  ( {number} {part.nets.get(number, '?')} )" for number, _ in part.symbol.pins]
        lines.append(" )")
    return "\n".join([*lines, ")", "*", ""]).encode()


def legacy_lines(trial: Trial) -> bytes:
    """One line a net."""
    nets = trial.nets().items()
    return "".join(f"{net}\t{' '.join(f'{part.ref}-{pin}' for part, pin in nodes)} \n" for net, nodes in nets).encode()


def ipcd356(trial: Trial, places: bool = False) -> bytes:
    """IPC-D-356A, part by part; net names of more than 14 characters get an alias, pins in no net are `N/C`.

    places: whether the pads lie somewhere: 10 mm apart, each part in a field of its own.
    Raises ValueError for a reference or pin longer than the form keeps.
    """
    long = [net for net in trial.nets() if len(net) > 14 or not net.isascii()]
    alias = {net: f"NNAME{at}" for at, net in enumerate(long, 1)}
    lines = ["P  JOB board", "P  UNITS CUST 0", *(f"P  {name} {net}" for net, name in alias.items())]
    for at, part in enumerate(trial.parts):
        for column, (pin, _) in enumerate(part.symbol.pins):
            if len(part.ref) > 6 or len(pin) > 4:
                raise ValueError(f"{part.ref}.{pin} is too long for the form")
            net = part.nets.get(pin, "N/C")
            names = f"317{alias.get(net, net):<14}   {part.ref:<6}-{pin:<4} "
            x, y = 100_000 * (at % 18 - 9) + 4_000 * (column % 16), 100_000 * (at // 18 - 9) + 4_000 * (column // 16)
            figures = f"D0354PA00X{x:+07d}Y{y:+07d}X0591Y0000R000S0" if places else ""
            lines.append(names + figures)
    return "\n".join([*lines, "999", ""]).encode()


def _string(text: str) -> str:
    """A string of EDIF: what it cannot hold stands as decimal codes between per cent signs."""
    plain = (letter if " " <= letter <= "~" and letter not in '"%' else f"%{ord(letter)}%" for letter in text)
    return f'"{"".join(plain)}"'


def edif(trial: Trial) -> bytes:
    """EDIF 2 0 0, netlist view, one level: the libraries of the symbols, then the board; values and the rest as properties."""
    cells = {(part.symbol.library, part.library_part): part.symbol for part in trial.parts}
    names = {key: f"CELL{at}" for at, key in enumerate(cells)}
    libraries = {library: f"LIB{at}" for at, library in enumerate(dict.fromkeys(library for library, _ in cells))}
    frame = "(edifLevel 0) (technology (numberDefinition))"
    lines = ["(edif board (edifVersion 2 0 0) (edifLevel 0) (keywordMap (keywordLevel 0))"]
    for library, handle in libraries.items():
        lines.append(f" (library (rename {handle} {_string(library)}) {frame}")
        for key in (key for key in cells if key[0] == library):
            lines.append(
                f"  (cell (rename {names[key]} {_string(key[1])}) (cellType GENERIC) (view v (viewType NETLIST) (interface"
            )
            for at, (number, label) in enumerate(cells[key].pins):
                shown = f"(rename P{at} {_string(label or number)})"
                lines.append(f"   (port {shown} (direction INOUT) (designator {_string(number)}))")
            lines.append("  )))")
        lines.append(" )")
    lines.append(f" (library boards {frame} (cell board (cellType GENERIC) (view v (viewType NETLIST) (interface) (contents")
    places = {}
    for at, part in enumerate(trial.parts):
        key = part.symbol.library, part.library_part
        said = {"Value": part.value, "Footprint": part.footprint, "Description": part.symbol.description}
        said |= {name: text for name, text in part.keys.items() if name[:1].isupper()} | ({} if part.fitted else {"DNP": "yes"})
        cell = f"(cellRef {names[key]} (libraryRef {libraries[key[0]]}))"
        lines.append(f"  (instance I{at} (viewRef v {cell}) (designator {_string(part.ref)})")
        names_of = (f"(rename K{place} {_string(name)})" for place, name in enumerate(said))
        lines += [
            f"   (property {name} (string {_string(text)}))" for name, text in zip(names_of, said.values(), strict=True) if text
        ]
        lines.append("  )")
        places.update(
            {(part.ref, number): f"(portRef P{pin} (instanceRef I{at}))" for pin, (number, _) in enumerate(part.symbol.pins)}
        )
    for at, (net, nodes) in enumerate(trial.nets().items()):
        lines.append(f"  (net (rename N{at} {_string(net)}) (joined")
        lines += [f"   {places[part.ref, pin]}" for part, pin in nodes]
        lines.append("  ))")
    return "\n".join([*lines, " ))))", " (design board (cellRef board (libraryRef boards))))", ""]).encode()


FORMS: dict[str, Callable[[Trial], bytes]] = {
    "sexpr": sexpr,
    "xml": xml,
    "edif": edif,
    "legacy-list": legacy_list,
    "legacy-lines": legacy_lines,
    "ipcd356": ipcd356,
}
CARRY_VALUES = frozenset({"sexpr", "xml", "edif", "legacy-list"})
CARRY_PIN_NAMES = frozenset({"sexpr", "xml", "edif"})


def values(trial: Trial) -> bytes:
    """A bill of materials as CSV with what a schematic says of each part that is on a net: value, footprint, description of the
    symbol, fields. Marks and mounting holes are on none; forms that list pins do not know them.
    """
    fields = list(dict.fromkeys(key for part in trial.parts for key in part.keys if key[:1].isupper()))
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(["Reference", "Value", "Footprint", "Description", *fields, "DNP"])
    for part in (part for part in trial.parts if part.nets):
        said = [part.value, part.footprint, part.symbol.description or part.library_part]
        writer.writerow([part.ref, *said, *(part.keys.get(key, "") for key in fields), "" if part.fitted else "DNP"])
    return text.getvalue().encode()


def demo(name: str) -> Trial:
    """A demo design of tests/demo_source.py, drawn as a trial."""
    drawn, _ = demo_source.DESIGNS[name]
    places: dict[str, tuple[str, str]] = {}
    for item in sorted(drawn, key=lambda item: demo_source.natural(item.ref)):
        for (number, *_), net in zip(demo_source.pins(item.symbol), item.nets, strict=True):
            places.setdefault(net, (item.ref, number))
    names = {net: f"Net-({ref}-Pad{number})" if net.startswith("?") else net for net, (ref, number) in places.items()}
    parts = []
    for item in drawn:
        library, what, _ = demo_source.SYMBOLS[item.symbol]
        pins = tuple((number, label) for number, label, _ in demo_source.pins(item.symbol))
        symbol = Symbol(item.symbol, library, item.symbol, what, pins, ())
        nets = {number: names[net] for (number, _), net in zip(pins, item.nets, strict=True)}
        parts.append(Part(item.ref, item.value, symbol, item.footprint, nets, {"MPN": item.mpn} if item.mpn else {}))
    return Trial(name, {"form": "E", "title": demo_source.TITLE}, tuple(parts))
