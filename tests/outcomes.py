"""Prints pass, fail and open per rule and shipped design, as a Markdown table for DEVELOPERS.md: `python -m tests.outcomes`."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

from checker import plugins
from checker.api import verify

DESIGNS = Path(__file__).resolve().parents[1] / "fixtures" / "designs"


def table() -> str:
    """One row a rule, one column a design: `pass / fail / open`."""
    names = ("greenhouse", "greenhouse-wrong")
    counts = {name: Counter((v.rule, v.outcome) for v in _report(name).verdicts) for name in names}
    trials = sorted(path.parent for path in (DESIGNS / "trials").glob("*/expected.yaml"))
    together: Counter[tuple[str, str]] = Counter()
    for folder in trials:
        together.update((v.rule, v.outcome) for v in _trial(folder).verdicts)
    counts[f"{len(trials)} trials"] = together
    lines = ["| rule | " + " | ".join(counts) + " |", "|---|" + "---|" * len(counts)]
    for rule in plugins.rule_ids():
        cells = [" / ".join(str(count[rule, outcome]) for outcome in ("pass", "fail", "open")) for count in counts.values()]
        lines.append(f"| {rule} | " + " | ".join(cells) + " |")
    return "\n".join(lines)


def _report(name: str):
    folder = DESIGNS / name
    return verify(folder / "greenhouse.net", bom=[folder / "bom.csv"], declaration=folder / "declaration.yaml")


def _trial(folder: Path):
    netlist = next(path for suffix in ("net", "xml") if (path := folder / f"board.{suffix}").exists())
    declaration = folder / "declaration.yaml"
    bom = [path for path in (folder / "bom.csv", folder / "bom.tsv") if path.exists()]
    return verify(netlist, bom=bom, declaration=declaration if declaration.exists() else None)


if __name__ == "__main__":
    print(table())
