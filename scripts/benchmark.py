"""Measures the speed and memory of sitesym as ratios within one run, and prints them beside their limits.

    .venv/bin/python scripts/benchmark.py              about a minute
    .venv/bin/python scripts/benchmark.py --rounds 15  steadier on a busy machine

Whole processes are compared with `import numpy` or `import numpy, spglib`; the analysis in process with
`spglib.get_symmetry_dataset` of the same cell (the analysis by sites has limits, what the tolerance scan and the
molecules add to it is shown beside it); memory with importing numpy and spglib and reading the same file.
Every time is the best of several rounds, the rivals taking turns within a round. The exit code is 1 if a
limit is passed.

This process imports nothing heavy, and every measurement runs in a process of its own: a child inherits the peak memory
of its parent, and a warm import would flatter the next case. Linear algebra keeps to one thread, as it does in the
command line: the matrices are small.
"""

import argparse
import json
import math
import os
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
UREA = str(STRUCTURES / "urea.cif")
ATOMS = 2000
LARGE_CELL = ["60.0 0.0 0.0", "2.9 30.3 0.0", "-3.7 1.3 30.7"]
MOLECULAR_CELL = ["48.0 0.0 0.0", "0.0 24.3 0.0", "0.0 0.0 25.1"]
CHAIN_CELL = ["62.0 0.0 0.0", "0.0 24.0 0.0", "0.0 0.0 25.0"]
PBCA = [(1, 1, 1, 0, 0, 0), (-1, -1, 1, 0.5, 0, 0.5), (-1, 1, -1, 0, 0.5, 0.5), (1, -1, -1, 0.5, 0.5, 0)]
"""Signs of x, y, z and translations of half the operations of Pbca; the others are their inversions."""

Point = tuple[float, float, float]


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
options = {"tolerance": 0.01, "scan": False, "molecules": False}
tasks = {
    "dataset": lambda: spglib.get_symmetry_dataset(cell, symprec=0.01),
    "analysis": lambda: sitesym.analyse(structure, **options),
    "with scan": lambda: sitesym.analyse(structure, **options | {"scan": True}),
    "with molecules": lambda: sitesym.analyse(structure, **options | {"molecules": True}),
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
    sitesym.analyse(structure, **options | {"scan": scan})
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
    """Zone-centre analysis by atomic sites; what the tolerance scan and the molecules add to it is shown beside it."""
    cases = [
        (CALCITE, 30, "30 atoms, calcite", 10.0, 4 * rounds),
        (PYROPE, 160, "160 atoms in Ia-3d, pyrope", 3.0, rounds),
        (large, ATOMS, f"{ATOMS} atoms in P-1", 1.5, min(rounds, 4)),
    ]
    rows = []
    for path, atoms, title, limit, turns in cases:
        best = child(TIME_ANALYSIS, path, str(turns), str(atoms))
        dataset = 1e3 * best["dataset"]
        rows.append(Row(f"analysis, {title}", 1e3 * best["analysis"], "one dataset", dataset, "ms", limit))
        rows += [
            Row(
                f"... {what}, in addition",
                1e3 * max(best[what] - best["analysis"], 0.0),
                "one dataset",
                dataset,
                "ms",
                None,
            )
            for what in ("with scan", "with molecules")
        ]
        rows.append(Row("... dataset calls of the scan", best["calls of the scan"], "one call", 1.0, "  ", 8.0))
    return rows


# Molecules ------------------------------------------------------------------------------------------------------------

TIME_FULLERENE = """
import json, sys, time
from itertools import permutations, product
import numpy as np
from sitesym.molecule_symmetry import find_operations
golden = (1 + 5**0.5) / 2
kinds = [(0, 1, 3 * golden), (1, 2 + golden, 2 * golden), (golden, 2, 2 * golden + 1)]
points = {
    tuple(round(sign * value, 9) + 0.0 for sign, value in zip(signs, np.roll(kind, turn)))
    for kind in kinds for turn in range(3) for signs in product((1, -1), repeat=3)
}
shape = 1.43 / 2 * np.array(sorted(points)) + np.random.default_rng(7).normal(0, 0.01, (60, 3))
best = float("inf")
for attempt in range(int(sys.argv[1])):
    start = time.perf_counter()
    found = find_operations(["C"] * 60, shape)
    best = min(best, time.perf_counter() - start)
assert len(found.operations) == 120, f"{len(found.operations)} operations, not the 120 of Ih"
print(json.dumps({"fullerene": best}))
"""


def molecule_rows(rounds: int, chains: str, molecular: str) -> list[Row]:
    """Molecules in cells of about 500 atoms against 5 datasets and 50 ms; group of C60, scattered by 0.01 Å, in 300 ms.

    The limit is for a molecular crystal as they are: one molecule and its images. Twenty-one molecules that no symmetry
    relates cost twenty-one times the search for one, and are shown beside it.
    """
    fullerene = 1e3 * child(TIME_FULLERENE, str(rounds))["fullerene"]
    return [
        molecule_row("molecules, 496 atoms, Z' = 1 in Pbca", child(TIME_ANALYSIS, chains, str(rounds), "496"), 1.0),
        molecule_row("molecules, 504 atoms, 21 sorts, P-1", child(TIME_ANALYSIS, molecular, str(rounds), "504"), None),
        Row("point group of C60", fullerene, "300 ms", 300.0, "ms", 1.0),
    ]


def molecule_row(what: str, best: dict[str, float], limit: float | None) -> Row:
    added = 1e3 * (best["with molecules"] - best["analysis"])
    return Row(what, added, "5 datasets + 50 ms", 5e3 * best["dataset"] + 50, "ms", limit)


# Plans ----------------------------------------------------------------------------------------------------------------

TIME_PLAN = """
import json, sys, time
import sitesym
structure = sitesym.read(sys.argv[1])
analysis = sitesym.analyse(structure, scan=False, molecules=False)
start = time.perf_counter()
sheet = sitesym.plan(
    analysis, faces=["001", "100", "010", "110", "101", "011"], mounts=["backscattering", "right-angle", "forward"]
)
planned = time.perf_counter()
from sitesym.experiment.curves import angle_curves
from sitesym.views.figures.polar import polar_plot
drawings = [polar_plot(curve, "p") for curve in angle_curves(analysis, "001") if curve.allowed]
assert sheet.steps and drawings
print(json.dumps({"plan": planned - start, "polar": (time.perf_counter() - planned) / len(drawings)}))
"""


def plan_rows(rounds: int) -> list[Row]:
    """The first plan and the first figure of a process, imports included, against the times allowed for them."""
    runs = [child(TIME_PLAN, UREA) for _ in range(rounds)]
    plan, polar = (1e3 * min(run[name] for run in runs) for name in ("plan", "polar"))
    return [
        Row("plan, 6 faces, 3 mounts, urea", plan, "time allowed", 500.0, "ms", 1.0),
        Row("polar figure, urea on (001)", polar, "time allowed", 300.0, "ms", 1.0),
    ]


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


# The large cells ------------------------------------------------------------------------------------------------------


def write_large_cell(path: Path) -> None:
    """A triclinic cell with atoms on a shaken grid 3 Å wide, each with its inversion image; elements at random."""
    chance = random.Random(20_261)
    points: dict[str, list[Point]] = {element: [] for element in ("Na", "K", "Cl", "Br")}
    for i in range(ATOMS // 2):
        node = (i // 100, i // 10 % 10, i % 10)
        x, y, z = ((n + 0.5 + chance.uniform(-0.2, 0.2)) / 10 for n in node)
        points[chance.choice(list(points))] += [(x / 2, y, z), (1 - x / 2, 1 - y, 1 - z)]
    write_poscar(path, f"{ATOMS} atoms in P-1, made at random", LARGE_CELL, points)


def write_chain_cell(path: Path) -> None:
    """Eicosane, C20H42, with bonds and angles shaken a little, in general position in Pbca: eight molecules."""
    chance = random.Random(20_263)
    atoms: list[tuple[str, Point]] = []
    for k in range(20):
        side = 1 if k % 2 else -1
        carbon = (1.27 * (k - 9.5), 0.43 * side, 0.0)
        hydrogens = [(0.0, 0.63 * side, 0.88), (0.0, 0.63 * side, -0.88)]
        if k in (0, 19):
            hydrogens.append((-0.9 if k == 0 else 0.9, -0.63 * side, 0.0))
        atoms += [("C", carbon), *(("H", tuple(c + h for c, h in zip(carbon, arm, strict=True))) for arm in hydrogens)]
    points: dict[str, list[Point]] = {"C": [], "H": []}
    for element, place in atoms:
        x, y, z = ((p + chance.uniform(-0.03, 0.03)) / w for p, w in zip(place, (62.0, 24.0, 25.0), strict=True))
        x, y, z = x + 0.25, y + 0.12, z + 0.12
        for a, b, c, d, e, f in PBCA:
            image = (a * x + d, b * y + e, c * z + f)
            points[element] += [image, (-image[0], -image[1], -image[2])]
    write_poscar(path, "Eicosane in Pbca, made for this measurement", CHAIN_CELL, points)


def write_molecular_cell(path: Path) -> None:
    """Benzene molecules in P-1: 21 pairs, each pair turned at random, on a grid 8 Å wide (504 atoms)."""
    chance = random.Random(20_262)
    points: dict[str, list[Point]] = {"C": [], "H": []}
    for i in range(21):
        first, second = orthogonal_pair(chance)
        centre = ((i // 9 + 0.5) / 6, (i // 3 % 3 + 0.5) / 3, (i % 3 + 0.5) / 3)
        for element, radius in (("C", 1.39), ("H", 2.48)):
            for turn in range(6):
                c, s = radius * math.cos(turn * math.pi / 3), radius * math.sin(turn * math.pi / 3)
                shift = [c * u + s * v for u, v in zip(first, second, strict=True)]
                x, y, z = (p + d / width for p, d, width in zip(centre, shift, (48.0, 24.3, 25.1), strict=True))
                points[element] += [(x, y, z), (1 - x, 1 - y, 1 - z)]
    write_poscar(path, "Benzene molecules in P-1, turned at random", MOLECULAR_CELL, points)


def orthogonal_pair(chance: random.Random) -> tuple[Point, Point]:
    """Two unit vectors at right angles, with the directions left to chance."""
    polar, around, twist = math.acos(chance.uniform(-1, 1)), chance.uniform(0, math.tau), chance.uniform(0, math.tau)
    down = (math.cos(polar) * math.cos(around), math.cos(polar) * math.sin(around), -math.sin(polar))
    along = (-math.sin(around), math.cos(around), 0.0)
    c, s = math.cos(twist), math.sin(twist)
    mixed = [(c * u + s * v, c * v - s * u) for u, v in zip(down, along, strict=True)]
    (a, d), (b, e), (c, f) = mixed
    return (a, b, c), (d, e, f)


def write_poscar(path: Path, title: str, cell: list[str], points: dict[str, list[Point]]) -> None:
    """The points, in fractions of the cell, as a POSCAR file."""
    lines = [title, "1.0", *cell, " ".join(points), " ".join(str(len(group)) for group in points.values()), "Direct"]
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
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    with tempfile.TemporaryDirectory() as folder:
        large = Path(folder) / "large.vasp"
        write_large_cell(large)
        molecular, chains = Path(folder) / "molecular.vasp", Path(folder) / "chains.vasp"
        write_molecular_cell(molecular)
        write_chain_cell(chains)
        rows = process_rows(rounds) + analysis_rows(rounds, str(large))
        rows += molecule_rows(rounds, str(chains), str(molecular)) + plan_rows(rounds) + memory_rows(str(large))
    print_table(rows)
    return int(any(row.over for row in rows))


if __name__ == "__main__":
    sys.exit(main())
