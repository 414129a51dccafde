"""The supply and the surroundings a design is judged under: declared, else assumed and said so."""

from __future__ import annotations

from dataclasses import replace

from checker.model.declaration import Declaration, Range, Supply
from checker.model.domain import Isolation
from checker.model.fact import Fact
from checker.model.rule import Assumption, Setting

# (field of Supply, key of the declaration, assumed Range or text, as written)
_MAINS_DEFAULTS: tuple[tuple[str, Range | str | int, str], ...] = (
    ("tolerance", Range(10.0, 10.0, "%"), "10 %"),
    ("frequency", Range(50.0, 60.0, "Hz"), "50-60 Hz"),
    ("phases", 1, "1"),
    ("overvoltage_category", "II", "II"),
    ("connection", "pluggable-A", "pluggable-A"),
)
_SURROUNDINGS = (
    (Fact("pollution_degree", "2"), "2"),
    (Fact("altitude", 2000.0, unit="m"), "2000 m"),
    (Fact("material_group", "IIIb"), "IIIb"),
)


def setting(declaration: Declaration, isolation: Isolation) -> Setting:
    """The supplies as judged, the protection class, and every assumption that replaces a missing declaration."""
    assumed: list[Assumption] = []
    supplies = list(declaration.supplies)
    on_mains = [domain for domain in isolation.domains.values() if domain.hazard == "mains"]
    if not supplies and declaration.no_supply is None and on_mains:
        supplies.append(Supply("mains", "mains", Range(100.0, 240.0, "V", "rms", text="100-240 V")))
        assumed.append(Assumption("supply.mains", "100-240 V", f"the netlist shows a mains supply ({on_mains[0].step.text})"))
    completed = [_complete(supply, assumed) if supply.kind == "mains" else supply for supply in supplies]
    mains = next((supply for supply in completed if supply.kind == "mains"), None)
    protection = next((supply.protection_class for supply in completed if supply.protection_class), "")
    if mains is not None and not protection:
        earth = next((domain for domain in isolation.domains.values() if domain.earthed), None)
        protection = "I" if earth else "II"
        because = (
            f"a protective earth conductor is connected ({earth.name})" if earth else "no protective earth conductor is connected"
        )
        assumed.append(Assumption("supply.protection_class", protection, because))
    environment = dict(declaration.environment)
    for fact, text in _SURROUNDINGS:
        if environment.setdefault(fact.attribute, fact) is fact and completed:
            because = "not declared; the usual value for equipment used indoors"
            assumed.append(Assumption(f"environment.{fact.attribute}", text, because))
    facts = tuple(Fact("supply", supply.kind, supply.source) for supply in declaration.supplies)
    return Setting(mains, tuple(completed), protection, mains.voltage if mains else None, tuple(assumed), facts, environment)


def _complete(supply: Supply, assumed: list[Assumption]) -> Supply:
    for field, value, text in _MAINS_DEFAULTS:
        if getattr(supply, field) in (None, ""):
            supply = replace(supply, **{field: value})  # type: ignore[arg-type]
            assumed.append(Assumption(f"supply.{field}", text, "not declared; the usual value for a pluggable supply"))
    return supply
