"""What a pole of a supply entry meets on its way to a fuse."""

from __future__ import annotations

from dataclasses import dataclass

from checker.model.rule import Analysis

# carried past on the way to the fuse: still the same conductor
_ON_THE_WAY = frozenset(
    "switch jumper net-tie test-point connector inlet ferrite inductor common-mode-choke filter thermistor".split()
)
_LOADS = frozenset(
    "varistor gas-tube tvs bridge diode transformer isolated-module thyristor controller mosfet bipolar igbt regulator ic module "
    "lamp motor optocoupler led zener".split()
)


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
    they are neither loads nor a way to the fuse. A switch for both poles is walked through to where a fuse sits; another part
    with more nets than two, such as a choke for both poles, is not walked through and counts as met.
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
            elif kind == "resistor" and not analysis.is_link(ref):
                resistors[ref] = None
            elif kind in _ON_THE_WAY or kind in ("resettable-fuse", "resistor"):
                passed[ref] = None
                ways = part.nets() if len(part.nets()) == 2 else _fused(analysis, part.nets()) if kind == "switch" else None
                if ways is None:
                    loads[ref] = None
                for other in ways or ():
                    if other not in nets:
                        nets[other] = None
                        queue.append(other)
            elif kind in _LOADS:
                loads[ref] = None
    loads_only = tuple(ref for ref in loads if ref not in fuses)
    return Before(tuple(fuses), tuple(passed), loads_only, tuple(capacitors), tuple(resistors), tuple(nets))


def _fused(analysis: Analysis, nets: tuple[str, ...]) -> tuple[str, ...]:
    """Those of a switch's nets on which a fitted fuse sits: behind its contact of this pole, as far as the netlist can tell."""
    return tuple(
        net
        for net in nets
        if any(
            analysis.kind(ref) == "fuse" and analysis.design.parts[ref].fitted
            for ref, _ in analysis.design.nets[net].pins
            if ref in analysis.choice
        )
    )
