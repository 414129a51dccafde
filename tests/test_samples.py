"""Real boards of public repositories (see the licence list beside them): every readable netlist is judged, and the usual
barrier parts are found. Skipped when the samples are absent."""

from __future__ import annotations

from pathlib import Path

import pytest

from checker.api import verify
from checker.errors import InputError

SAMPLES = Path(__file__).resolve().parents[2] / "shared" / "samples"
pytestmark = pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not here")

# parts across a barrier, by hand from the schematics' part types and nets
BARRIER_PARTS = {
    "coupler-bank/board.net": {f"U{at}" for at in range(1, 9)},
    "usb-isolator/board.net": {"U1", "U2"},
    "digital-isolator/board-legacy.net": {"U1", "U2", "U3", "U4"},
    "mains-rectifier/board.net": {"RL1", "RL2", "U4", "U5", "C18", "C25"},
    "no-barrier/board.net": set(),
    "no-barrier/board.xml": set(),
    "can-adapter/board.xml": set(),
    "mains-dimmer/board.net": set(),
    "bull-iso/board.net": set(),
    "bull-iso/board.xml": set(),
    "formats/sexpr-e-large.net": set(),
}
REFUSED = {  # a file that shows names only, and another form
    "edif-case.edf": "the cell of the design has no contents",
    "ipc2581-small.xml": "expected S-expression netlist, XML netlist",
}
POWER_OVER_ETHERNET = {"DCDC1", "LAN_CON1", "C20", "C23"}


def across(report):
    """Parts across any barrier."""
    return {part.part for barrier in report.barriers for part in barrier.parts}


@pytest.mark.parametrize("name", sorted(BARRIER_PARTS))
def test_barrier_parts_of_real_boards(name):
    assert across(verify(SAMPLES / name)) == BARRIER_PARTS[name]


def test_the_board_with_power_over_ethernet():
    assert across(verify(SAMPLES / "poe-isolated" / "board.net")) >= POWER_OVER_ETHERNET


def test_every_sample_is_judged_or_refused_with_a_message():
    judged, refused = 0, {}
    for path in sorted((*SAMPLES.rglob("*.net"), *SAMPLES.rglob("*.xml"), *SAMPLES.rglob("*.ipc"), *SAMPLES.rglob("*.edf"))):
        try:
            report = verify(path)
        except InputError as error:
            refused[path.name] = str(error)
        else:
            judged += 1
            assert report.domains
    assert judged >= 22
    assert set(refused) <= REFUSED.keys()
    assert all(REFUSED[name] in text for name, text in refused.items())


def test_no_real_board_fails_but_for_what_a_reviewer_would_name():
    """Fails on the boards without a mains side: the duplicate reference only, which is planted by its author."""
    for path in sorted((*SAMPLES.rglob("*.net"), *SAMPLES.rglob("*.xml"))):
        if "mains-rectifier" in path.parts:
            continue  # its d.c. link of several hundred volts leaves the board at open terminals
        try:
            report = verify(path)
        except InputError:
            continue
        failed = {(v.rule, tuple(v.parts)) for v in report.verdicts if v.outcome == "fail"}
        assert failed <= {("records", ("J2", "J2 (2)"))}, (path, failed)
