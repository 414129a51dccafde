"""Prints the speed of Withstand beside its targets: python tests/bench/run.py [--large] [--runs N] [--only WORD]

Medians of at least seven runs; both sides of a ratio are taken in turn in the same run, so that a busy machine slows both.
Nothing here fails: figures are for people, and a test on time would fail for reasons outside the code. --large adds 100,000 parts
(minutes).
"""

from __future__ import annotations

import argparse
import gc
import math
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path
from statistics import linear_regression, median
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT), str(Path(__file__).resolve().parent)]

import board_generator  # noqa: E402
from board_generator import Board  # noqa: E402

RUNS = 7
STAGES = ("assemble", "identify", "isolate", "setting", "needed", "report")  # functions that checker.pipeline calls
_CHILD = """
import os, resource, sys
from checker.cli import run
status = run(sys.argv[1:])
most = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * (1 if sys.platform == "darwin" else 1024)
print(status, most, file=sys.stderr)
"""


def show(what: str, figure: str, target: str = "", holds: bool | None = None) -> None:
    mark = {True: "met", False: "MISSED", None: ""}[holds]
    print(f"{what:<52} {figure:>26}   {target:<34} {mark}".rstrip(), flush=True)


# --- processes -------------------------------------------------------------------------------------------------------


def withstand(*arguments: str) -> list[str]:
    """The command line: the installed console script when there is one beside this Python."""
    script = Path(sys.executable).parent / "withstand"
    start = [str(script)] if script.is_file() else [sys.executable, "-c", "from checker.cli import main; main()"]
    return [*start, *arguments]


def cold(command: Sequence[str], cwd: Path) -> float:
    """Seconds of one process from start to end."""
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    start = time.perf_counter()
    subprocess.run(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=environment, cwd=cwd, check=False)
    return time.perf_counter() - start


def ratio(what: str, command: Sequence[str], other: Sequence[str], most: float, runs: int, cwd: Path) -> None:
    """The time of `command` over that of `other`, taken in turn."""
    cold(command, cwd), cold(other, cwd)  # byte code and disk are warm from here on
    pairs = [(cold(command, cwd), cold(other, cwd)) for _ in range(runs)]
    found = median(one / two for one, two in pairs)
    times = f"{1e3 * median(one for one, _ in pairs):.0f} ms / {1e3 * median(two for _, two in pairs):.0f} ms = {found:.2f}"
    show(what, times, f"at most {most:g}", found <= most)


def memory(folder: Path, parts: int) -> None:
    """Peak memory of a whole run. Before anything else: a process inherits the peak of the one that starts it."""
    subprocess.run([sys.executable, board_generator.__file__, str(parts), str(folder)], stdout=subprocess.DEVNULL, check=True)
    arguments = ["verify", "board.net", "--bom", "bom.csv", "--stop-at", "never"]
    done = subprocess.run(
        [sys.executable, "-c", _CHILD, *arguments],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        text=True,
        env=os.environ | {"PYTHONPATH": str(ROOT)},
        cwd=folder,
        check=False,
    )
    *messages, last = done.stderr.splitlines() or [""]
    status, _, peak = last.partition(" ")
    if status != "0" or messages:
        show(f"memory, {parts:,} parts", "not measured", f"status {status}: {' '.join(messages)[-200:]}", False)
        return
    size = (folder / "board.net").stat().st_size
    most = 15 * size + 100e6
    target = f"at most 15 x {size / 1e6:.0f} MB + 100 MB = {most / 1e6:.0f} MB"
    show(f"memory, {parts:,} parts", f"{int(peak) / 1e6:.0f} MB", target, int(peak) <= most)


# --- in this process -------------------------------------------------------------------------------------------------


@dataclass(slots=True)
class Times:
    """Seconds of one run: reading the netlist, reading the BOM, each stage, and writing; `rules` is what is left of judging."""

    netlist: float = 0.0
    bom: float = 0.0
    judged: float = 0.0
    writing: float = 0.0
    stages: dict[str, float] = field(default_factory=dict)
    barriers: int = 0
    verdicts: int = 0

    @property
    def after(self) -> float:
        """Everything after reading."""
        return self.judged + self.writing

    @property
    def whole(self) -> float:
        return self.netlist + self.bom + self.after

    def parts(self) -> dict[str, float]:
        """Seconds by stage, in the order they run."""
        known = {name: self.stages.get(name, 0.0) for name in STAGES}
        rest = self.judged - sum(known.values())
        return {"read netlist": self.netlist, "read BOM": self.bom, **known, "rules and choices": rest, "write text": self.writing}


@contextmanager
def stopwatch(times: Times) -> Iterator[None]:
    """Measures the stages that the pipeline calls."""
    from checker import pipeline

    whole: dict[str, Callable[..., Any]] = {name: getattr(pipeline, name) for name in STAGES}

    def timed(name: str) -> Callable[..., Any]:
        def call(*arguments: Any) -> Any:
            start = time.perf_counter()
            try:
                return whole[name](*arguments)
            finally:
                times.stages[name] = times.stages.get(name, 0.0) + time.perf_counter() - start

        return call

    try:
        for name in STAGES:
            setattr(pipeline, name, timed(name))
        yield
    finally:
        for name in STAGES:
            setattr(pipeline, name, whole[name])


def judged(board: Board) -> Times:
    """One run over a board, as the command line does it, without start-up."""
    from checker import files, pipeline, plugins, rulesets
    from checker.model.declaration import Declaration

    chosen = rulesets.load_all(rulesets.DEFAULT)
    blobs = files.read(board.netlist, shown="board.net"), files.read(board.bom, shown="bom.csv")
    readers = plugins.reader_for(blobs[0], "netlist"), plugins.reader_for(blobs[1], "bom")
    writer = plugins.writer("text")
    times = Times()
    gc.collect()
    gc.disable()  # as the console script does
    marks = [time.perf_counter()]
    netlist = readers[0].read(blobs[0])
    marks.append(time.perf_counter())
    bom = readers[1].read(blobs[1])
    marks.append(time.perf_counter())
    with stopwatch(times):
        result = pipeline.judge("board", [netlist, bom], Declaration(), chosen, ())
    marks.append(time.perf_counter())
    writer.write(result.report)
    marks.append(time.perf_counter())
    times.netlist, times.bom, times.judged, times.writing = (two - one for one, two in pairwise(marks))
    times.barriers, times.verdicts = len(result.report.barriers), len(result.report.verdicts)
    return times


def after_reading(board: Board, runs: int) -> None:
    """Everything after reading over the time the reader takes, and what each stage has of the whole."""
    judged(board)
    found = [judged(board) for _ in range(runs)]
    one = median(times.after / times.netlist for times in found)
    shown = f"{median(t.after for t in found):.2f} s / {median(t.netlist for t in found):.2f} s = {one:.2f}"
    show(f"everything after reading / reader, {board.parts:,} parts", shown, "at most 2", one <= 2)
    last = found[-1]
    show("  barriers found", str(last.barriers), f"{board.barriers} on the board", last.barriers == board.barriers)
    show("  verdicts", str(last.verdicts))
    for name in last.parts():
        share = median(times.parts()[name] / times.whole for times in found)
        show(f"  share of {name}", f"{1e3 * median(t.parts()[name] for t in found):.0f} ms, {100 * share:.0f} %")


def growth(boards: Sequence[Board], runs: int) -> None:
    """The slope of log time over log parts: 1 is linear."""
    points = []
    for board in boards:
        seconds = median(judged(board).whole for _ in range(runs))
        points.append((math.log(board.parts), math.log(seconds)))
        show(f"  {board.parts:,} parts, {board.supplies} supplies", f"{seconds:.2f} s, {1e6 * seconds / board.parts:.0f} us a part")
    slope = linear_regression(*zip(*points, strict=True)).slope
    show(f"growth, {boards[0].parts:,} to {boards[-1].parts:,} parts", f"slope {slope:.2f}", "at most 1.15", slope <= 1.15)


def main() -> None:
    options = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    options.add_argument("--large", action="store_true", help="with 100,000 parts: growth up to there, and memory")
    options.add_argument("--runs", type=int, default=RUNS, help=f"runs behind each median, {RUNS} at least for figures to quote")
    options.add_argument("--only", choices=["memory", "cold", "stages", "growth"], help="one group of rows")
    given = options.parse_args()
    wanted = {given.only} if given.only else {"memory", "cold", "stages", "growth"}
    runs = max(1, given.runs)
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        if given.large and "memory" in wanted:
            memory(folder / "memory", 100_000)
        if "cold" in wanted:
            desk = folder / "50"
            board_generator.write(50, desk)
            verify = withstand("verify", "board.net", "--bom", "bom.csv")
            libraries = [sys.executable, "-c", "import click, lxml.etree, networkx, yaml, msgspec"]
            ratio("withstand --help / python -c pass", withstand("--help"), [sys.executable, "-c", "pass"], 8, runs, desk)
            ratio("verify, 50 parts / import of its libraries", verify, libraries, 2, runs, desk)
        if "stages" in wanted:
            after_reading(board_generator.write(10_000, folder / "10000"), runs)
        if "growth" in wanted:
            sizes = (1_000, 3_000, 10_000, 30_000) + ((100_000,) if given.large else ())
            growth([board_generator.write(parts, folder / f"growth-{parts}") for parts in sizes], runs)


if __name__ == "__main__":
    main()
