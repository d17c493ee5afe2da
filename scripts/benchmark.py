"""Measures the speed and memory of sitesym as ratios within one run, and prints them beside their limits.

    .venv/bin/python scripts/benchmark.py              about a minute
    .venv/bin/python scripts/benchmark.py --rounds 15  steadier on a busy machine

Whole processes are compared with `import numpy` or `import numpy, spglib`; the analysis in process with
`spglib.get_symmetry_dataset` of the same cell; memory with importing numpy and spglib and reading the same file.
Every time is the best of several rounds, the rivals taking turns within a round. The exit code is 1 if a
limit is passed.

This process imports nothing heavy, and every measurement runs in a process of its own: a child inherits the peak memory
of its parent, and a warm import would flatter the next case.
"""

import argparse
import json
import random
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path

REPOSITORY = Path(__file__).resolve().parent.parent
STRUCTURES = REPOSITORY / "structures_demo"
CALCITE = str(STRUCTURES / "calcite.cif")
PYROPE = str(STRUCTURES / "pyrope.cif")
ATOMS = 2000


@dataclass(frozen=True)
class Row:
    """One line of the table: two measurements in one unit and the limit of their ratio (None: only to be seen)."""

    what: str
    measured: float
    against: str
    base: float
    unit: str
    limit: float | None

    @property
    def ratio(self) -> float:
        """Measured over base."""
        return self.measured / self.base

    @property
    def over(self) -> bool:
        """Whether the limit is passed."""
        return self.limit is not None and self.ratio > self.limit


# Whole processes ------------------------------------------------------------------------------------------------------


def sitesym_command() -> list[str]:
    """The installed command beside this Python, or its entry point run from the repository."""
    installed = Path(sys.executable).parent / "sitesym"
    if installed.exists():
        return [str(installed)]
    return [sys.executable, "-c", "import sys; from sitesym.cli import main; sys.exit(main())"]


def seconds(command: list[str]) -> float:
    start = time.perf_counter()
    done = subprocess.run(command, cwd=REPOSITORY, stdin=subprocess.DEVNULL, capture_output=True, text=True)
    elapsed = time.perf_counter() - start
    if done.returncode != 0:
        sys.exit(f"{' '.join(command)} failed with exit code {done.returncode}:\n{done.stderr.strip()}")
    return elapsed


def best_seconds(commands: dict[str, list[str]], rounds: int) -> dict[str, float]:
    """Best time of each command; they take turns, so that a busy moment hits them alike."""
    best = dict.fromkeys(commands, float("inf"))
    for command in commands.values():
        seconds(command)  # fills the disk cache and the compiled modules
    for _ in range(rounds):
        for name, command in commands.items():
            best[name] = min(best[name], seconds(command))
    return best


def process_rows(rounds: int) -> list[Row]:
    sitesym = sitesym_command()
    times = best_seconds(
        {
            "import numpy": [sys.executable, "-c", "import numpy"],
            "import numpy, spglib": [sys.executable, "-c", "import numpy, spglib"],
            "sitesym --help": [*sitesym, "--help"],
            "sitesym --version": [*sitesym, "--version"],
            "sitesym report calcite.cif --format json": [*sitesym, "report", CALCITE, "--format", "json"],
        },
        rounds,
    )
    pairs = [
        ("sitesym --help", "import numpy", 2.0),
        ("sitesym --version", "import numpy", 2.0),
        ("sitesym report calcite.cif --format json", "import numpy, spglib", 5.0),
    ]
    return [Row(what, 1e3 * times[what], base, 1e3 * times[base], "ms", limit) for what, base, limit in pairs]


# The analysis in process ----------------------------------------------------------------------------------------------

PREPARE = """
import json, sys, time
import numpy as np
import spglib
import sitesym
path, rounds = sys.argv[1], int(sys.argv[2])
structure = sitesym.read(path)
cell = (structure.lattice, structure.fractional, structure.kinds)
"""

TIME_ANALYSIS = (
    PREPARE
    + """
tasks = {
    "dataset": lambda: spglib.get_symmetry_dataset(cell, symprec=0.01),
    "analysis": lambda: sitesym.analyse(structure, tolerance=0.01, scan=False),
    "with scan": lambda: sitesym.analyse(structure, tolerance=0.01, scan=True),
}
best = dict.fromkeys(tasks, float("inf"))
assert len(structure) == int(sys.argv[3]), f"{path} has {len(structure)} atoms, not {sys.argv[3]}"
for attempt in range(rounds + 1):
    for name, task in tasks.items():
        start = time.perf_counter()
        task()
        if attempt:  # the first turn only warms up
            best[name] = min(best[name], time.perf_counter() - start)
calls = {}
original = spglib.get_symmetry_dataset
for scan in (False, True):
    def counting(*arguments, **options):
        calls[scan] = calls.get(scan, 0) + 1
        return original(*arguments, **options)
    spglib.get_symmetry_dataset = counting
    sitesym.analyse(structure, tolerance=0.01, scan=scan)
assert False in calls, "no dataset call was seen: the analysis calls spglib in another way than this script expects"
print(json.dumps(best | {"calls of the scan": calls[True] - calls[False]}))
"""
)


def child(program: str, *arguments: str) -> dict[str, float]:
    """Runs a program in a Python of its own; it prints one JSON object."""
    command = [sys.executable, "-c", program, *arguments]
    done = subprocess.run(command, cwd=REPOSITORY, stdin=subprocess.DEVNULL, capture_output=True, text=True)
    if done.returncode != 0:
        sys.exit(f"A measurement failed:\n{done.stderr.strip()}")
    result: dict[str, float] = json.loads(done.stdout)
    return result


def analysis_rows(rounds: int, large: str) -> list[Row]:
    cases = [
        (CALCITE, 30, "30 atoms, calcite", 10.0, 4 * rounds),
        (PYROPE, 160, "160 atoms in Ia-3d, pyrope", 3.0, rounds),
        (large, ATOMS, f"{ATOMS} atoms in P-1", 1.5, min(rounds, 4)),
    ]
    rows = []
    for path, atoms, title, limit, turns in cases:
        best = child(TIME_ANALYSIS, path, str(turns), str(atoms))
        dataset = 1e3 * best["dataset"]
        scan = 1e3 * max(best["with scan"] - best["analysis"], 0.0)
        rows.append(Row(f"analysis, {title}", 1e3 * best["analysis"], "one dataset", dataset, "ms", limit))
        rows.append(Row(f"tolerance scan, {title}", scan, "one dataset", dataset, "ms", None))
        rows.append(Row(f"dataset calls of the scan, {title}", best["calls of the scan"], "one call", 1.0, "  ", 8.0))
    return rows


# Memory ---------------------------------------------------------------------------------------------------------------

PEAK = """
import resource
peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
print(json.dumps({"MB": peak / (2**20 if sys.platform == "darwin" else 1024)}))
"""


def memory_rows(large: str) -> list[Row]:
    base = child(PREPARE + PEAK, large, "0")["MB"]
    whole = child(PREPARE + "sitesym.analyse(structure)\n" + PEAK, large, "0")["MB"]
    return [Row(f"peak memory, {ATOMS} atoms in P-1", whole, "imports and reading", base, "MB", 2.0)]


# The large cell -------------------------------------------------------------------------------------------------------


def write_large_cell(path: Path) -> None:
    """A triclinic cell with atoms on a shaken grid 3 Å wide, each with its inversion image; elements at random."""
    chance = random.Random(20_261)
    points: dict[str, list[tuple[float, float, float]]] = {element: [] for element in ("Na", "K", "Cl", "Br")}
    for i in range(ATOMS // 2):
        node = (i // 100, i // 10 % 10, i % 10)
        x, y, z = ((n + 0.5 + chance.uniform(-0.2, 0.2)) / 10 for n in node)
        points[chance.choice(list(points))] += [(x / 2, y, z), (1 - x / 2, 1 - y, 1 - z)]
    lines = [f"{ATOMS} atoms in P-1, made at random", "1.0", "60.0 0.0 0.0", "2.9 30.3 0.0", "-3.7 1.3 30.7"]
    lines += [" ".join(points), " ".join(str(len(group)) for group in points.values()), "Direct"]
    lines += [f"{x:.10f} {y:.10f} {z:.10f}" for group in points.values() for x, y, z in group]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")


def print_table(rows: list[Row]) -> None:
    wide = max(len(row.what) for row in rows)
    against = max(len(row.against) for row in rows)
    print(f"{'':{wide}}  {'measured':>11}  {'against':{against}}  {'base':>11}  {'ratio':>6}  {'limit':>5}")
    for row in rows:
        limit = "" if row.limit is None else f"{row.limit:.1f}"
        verdict = "" if row.limit is None else "over" if row.over else "ok"
        print(
            f"{row.what:{wide}}  {row.measured:8.1f} {row.unit}  {row.against:{against}}  {row.base:8.1f} {row.unit}"
            f"  {row.ratio:6.2f}  {limit:>5}  {verdict}"
        )


def main() -> int:
    parser = argparse.ArgumentParser(description="Speed and memory of sitesym as ratios within one run.")
    parser.add_argument("--rounds", type=int, default=7, help="rounds of which the best counts (default 7)")
    rounds = max(1, parser.parse_args().rounds)
    with tempfile.TemporaryDirectory() as folder:
        large = Path(folder) / "large.vasp"
        write_large_cell(large)
        rows = process_rows(rounds) + analysis_rows(rounds, str(large)) + memory_rows(str(large))
    print_table(rows)
    return int(any(row.over for row in rows))


if __name__ == "__main__":
    sys.exit(main())
