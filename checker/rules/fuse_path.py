"""What a pole of a supply entry meets on its way to a fuse."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.rule import Analysis

# carried past on the way to the fuse: still the same conductor
_ON_THE_WAY = frozenset(
    {
        "switch",
        "jumper",
        "net-tie",
        "test-point",
        "connector",
        "inlet",
        "ferrite",
        "inductor",
        "common-mode-choke",
        "filter",
        "thermistor",
    }
)
_LOADS = frozenset(
    "varistor gas-tube tvs bridge diode transformer isolated-module thyristor controller mosfet bipolar igbt regulator ic module "
    "lamp motor optocoupler led zener".split()
)
LINK = 1.0  # ohm; a resistor below this in the line is a link or a shunt, not a load (common practice, no source)


@dataclass(frozen=True, slots=True)
class Before:
    """What a pole meets before any fuse: fuses that end it, parts passed, loads tapped, line capacitors, resistors."""

    fuses: tuple[str, ...]
    passed: tuple[str, ...]
    loads: tuple[str, ...]
    capacitors: tuple[str, ...]
    resistors: tuple[str, ...]
    nets: tuple[str, ...]


def toward_fuse(analysis: Analysis, pole: str) -> Before:
    """Walk a pole's conductor up to its fuses.

    Contacts, triacs and current transformers hand the line to a load outside the board, whose protection is not this board's:
    they are neither loads nor a way to the fuse. A part with more nets than two, such as a choke for both poles, is not walked
    through and counts as met.
    """
    nets, fuses, passed, loads, capacitors, resistors = (
        {pole: None},
        dict[str, None](),
        dict[str, None](),
        dict[str, None](),
        dict[str, None](),
        dict[str, None](),
    )
    queue = [pole]
    for net in queue:
        for ref, _ in analysis.design.nets[net].pins:
            part = analysis.design.parts.get(ref)
            if part is None or not part.fitted:
                continue
            kind = analysis.kind(ref)
            if kind == "fuse":
                fuses[ref] = None
            elif kind == "capacitor":
                capacitors[ref] = None
            elif kind in ("connector", "inlet", "test-point"):
                continue
            elif kind == "resistor" and not _is_link(analysis, ref):
                resistors[ref] = None
            elif kind in _ON_THE_WAY or kind in ("resettable-fuse", "resistor"):
                passed[ref] = None
                if len(part.nets()) == 2:
                    for other in part.nets():
                        if other not in nets:
                            nets[other] = None
                            queue.append(other)
                else:
                    loads[ref] = None
            elif kind in _LOADS:
                loads[ref] = None
    loads_only = tuple(ref for ref in loads if ref not in fuses)
    return Before(tuple(fuses), tuple(passed), loads_only, tuple(capacitors), tuple(resistors), tuple(nets))


def _is_link(analysis: Analysis, ref: str) -> bool:
    value = analysis.choice[ref].value
    return value is not None and isinstance(value.value, float) and value.value < LINK
