"""Surge limiters in series between two poles of the mains, or a pole and earth."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from checker.model.names import earth_like
from checker.model.rule import Analysis

_LIMITERS = frozenset({"varistor", "gas-tube", "spark-gap", "tvs"})
_LONGEST = 4  # limiters in one string
_CROWDED = 8  # a net with more limiters is no link between two


@dataclass(frozen=True, slots=True)
class LimiterString:
    """Limiters in series from one net to another; the nets between them have nothing else."""

    parts: tuple[str, ...]
    ends: tuple[str, str]


def strings(analysis: Analysis) -> list[LimiterString]:
    """Every string of limiters from a pole to another pole or to earth, each once, in file order."""
    found: dict[tuple[frozenset[str], frozenset[str]], LimiterString] = {}
    for ref in analysis.choice:
        if analysis.kind(ref) in _LIMITERS and analysis.design.parts[ref].fitted:
            for net in analysis.design.parts[ref].nets():
                if net in analysis.stress.poles:
                    for string in _from(analysis, (ref,), net, net):
                        found.setdefault((frozenset(string.parts), frozenset(string.ends)), string)
    return [string for string in found.values() if any(analysis.kind(ref) != "tvs" for ref in string.parts)]


def _from(analysis: Analysis, parts: tuple[str, ...], start: str, net: str) -> Iterator[LimiterString]:
    """Strings that begin at `start` with `parts`, the last of which is entered at `net`."""
    poles = analysis.stress.poles
    for end in analysis.design.parts[parts[-1]].nets():
        if end == net:
            continue
        further = [] if end in poles else _further(analysis, end, parts)
        if not further and (end in poles or is_earth(analysis, end)):
            if poles.get(end) != poles[start]:
                yield LimiterString(parts, (start, end))
        elif len(parts) < _LONGEST:
            for ref in further:
                yield from _from(analysis, (*parts, ref), start, end)


def _further(analysis: Analysis, net: str, parts: tuple[str, ...]) -> list[str]:
    """The limiters that follow on a net with nothing but limiters; none on protective earth itself."""
    if len(analysis.design.nets[net].pins) > _CROWDED or earth_like(net):
        return []
    others = analysis.fitted_on(net)
    return [ref for ref in others if ref not in parts] if all(analysis.kind(ref) in _LIMITERS for ref in others) else []


def is_earth(analysis: Analysis, net: str) -> bool:
    """Whether a net is bonded to protective earth."""
    name = analysis.isolation.domain_of.get(net)
    return name is not None and analysis.isolation.domains[name].earthed
