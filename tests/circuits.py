"""Small circuits for tests, written as `{ref: (kind, {pin: net})}`, with kinds given instead of identified."""

from __future__ import annotations

from checker.model.candidate import Candidate, Mark, Winding
from checker.model.circuit import Design, Net, Part, Pin
from checker.model.fact import Fact, Source


def design(parts: dict[str, tuple[str, dict[str, str]]], unfitted: frozenset[str] = frozenset()) -> Design:
    """A Design whose lines are the positions of the parts."""
    nets: dict[str, list[tuple[str, str]]] = {}
    built = {}
    for line, (ref, (_, pins)) in enumerate(parts.items(), 1):
        for pin, net in pins.items():
            nets.setdefault(net, []).append((ref, pin))
        listed = tuple(Pin(pin, "", "", net) for pin, net in pins.items())
        built[ref] = Part(ref, listed, (), (Source("test.net", line),), fitted=ref not in unfitted)
    joined = {name: Net(name, tuple(pins), Source("test.net", 1), name.startswith("Net-(")) for name, pins in nets.items()}
    return Design("test", built, joined)


def choice(parts: dict[str, tuple[str, dict[str, str]]], **more: dict[str, object]) -> dict[str, Candidate]:
    """Candidates of these kinds; `more` gives fields by reference, such as C1={"value": 1e-9, "marks": ["Y1"]}."""
    found = {}
    for ref, (kind, _) in parts.items():
        extra = dict(more.get(ref, {}))
        if "value" in extra:
            extra["value"] = Fact("value", extra["value"], unit="F")
        extra["marks"] = tuple(Mark(name, Fact("mark", name)) for name in extra.get("marks", ()))
        extra["windings"] = tuple(Winding(pins) for pins in extra.get("windings", ()))
        found[ref] = Candidate(kind, because="given", **extra)
    return found
