"""Generator of the trial designs: from every `circuit.txt` the netlist, the BOM and the answer sheet beside it.

python -m tests.trial_sources            writes every design
python -m tests.trial_sources NAME ...   writes those
"""

from __future__ import annotations

import csv
import io
import re
import sys

import yaml

from tests.trial_circuits import Part, Trial, folders, natural, read
from tests.trial_netlists import netlist

_NOT_BOUGHT = {"TP", "HOLE", "HOLEP", "FID", "NETTIE", "JP", "JPO"}


def _ranged(refs: list[str]) -> str:
    """C1, C2, C3, C7 -> `C1-C3, C7`."""
    runs: list[list[str]] = []
    for ref in refs:
        here = natural(ref)
        last = natural(runs[-1][-1]) if runs else ()
        if last and len(here) == len(last) == 1 and here[0] == (last[0][0], last[0][1] + 1):
            runs[-1].append(ref)
        else:
            runs.append([ref])
    return ", ".join(f"{run[0]}-{run[-1]}" if len(run) > 2 else ", ".join(run) for run in runs)


def _cell(key: str, row: list[Part], item: int, words: list[str]) -> str:
    part, refs = row[0], [one.ref for one in row]
    known = {
        "refs": _ranged(refs)
        if "ranges" in words
        else (" " if "blanks" in words else "," if "joined" in words else ", ").join(refs),
        "qty": str(len(row)),
        "item": str(item),
        "value": part.value,
        "footprint": part.footprint,
        "package": part.footprint.rpartition(":")[2],
        "dnp": "" if part.fitted else "DNP",
        "fit": "yes" if part.fitted else "no",
    }
    text = known.get(key, part.keys.get(key, ""))
    return re.sub(r"(?<=\d)\.(?=\d)", ",", text) if "decimal-comma" in words and key in ("value", "desc", "voltage") else text


def bom(trial: Trial) -> tuple[str, bytes] | None:
    """File name and bytes of the BOM; None where the repository has none.

    Bare-board marks and test points are left out, as usual; unfitted parts too where no column says which they are.
    """
    words = trial.header.get("bom", "").split()
    if not words:
        return None
    columns = [one.strip().rsplit("=", 1) for one in trial.header["columns"].split(" | ")]
    marked = any(key in ("dnp", "fit") for _, key in columns)
    rows: dict[tuple[object, ...], list[Part]] = {}
    for part in sorted(trial.parts, key=lambda part: natural(part.ref)):
        if part.symbol.name in _NOT_BOUGHT or "nobom" in part.keys or not (part.fitted or marked):
            continue
        rows.setdefault((part.value, part.footprint, part.symbol.name, tuple(sorted(part.keys.items()))), []).append(part)
    wide = "utf-16" in words
    text = io.StringIO()
    delimiter = "\t" if "tab" in words else ";" if "semicolon" in words else ","
    writer = csv.writer(text, delimiter=delimiter, lineterminator="\r\n" if wide else "\n")
    if "preamble" in words:
        text.write(f"Project: {trial.header['title']}\nRevision: 1.2\nDate: 2024-03-11\nState: release\n\n")
    writer.writerow([heading.strip() for heading, _ in columns])
    for item, row in enumerate(rows.values(), 1):
        writer.writerow([_cell(key, row, item, words) for _, key in columns])
    body = b"\xff\xfe" + text.getvalue().encode("utf-16-le") if wide else text.getvalue().encode(words[1])
    return "bom.tsv" if "tab" in words else "bom.csv", body


def files(trial: Trial) -> dict[str, bytes]:
    """Every generated file of a design: name -> bytes."""
    found = dict([netlist(trial)])
    listed = bom(trial)
    if listed:
        found[listed[0]] = listed[1]
    sheet = yaml.safe_dump(trial.answers, sort_keys=False, allow_unicode=True, width=120, default_flow_style=None)
    found["expected.yaml"] = b"# Generated from circuit.txt; the answers there are written by hand.\n" + sheet.encode()
    return found


def main(names: list[str]) -> int:
    """Writes the files of the named designs, of all when none is named."""
    for folder in folders():
        if not names or folder.name in names:
            for name, data in files(read(folder)).items():
                (folder / name).write_bytes(data)
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
