"""What confidence, scans and many states cost, and how the cost grows.

Run from the checkout on a quiet machine::

    PYTHONPATH=.:tests python tests/bench/benchmark_confidence.py

Each figure is the median of several runs: processor time (user and system) of the
process, and the wall clock beside it. Cold means a new process, imports included.
Beside PHREEQC and scipy: ``benchmark_solver.py``.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")

import argparse
import resource
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
from reference_tables import library

from formbuf.advice.case import case_for
from formbuf.advice.confidence import with_confidence
from formbuf.advice.scan_grid import grid_of, parse_axis
from formbuf.advice.scan_states import state_scan
from formbuf.advice.shortlist import shortlist
from formbuf.chemistry.equilibrium import solve
from formbuf.product.brief import complete, read_brief
from formbuf.product.composition import ladder_of

EXAMPLES = Path(__file__).parents[2] / "examples"
SPECIES = ("citrate", "phosphate", "acetate", "histidine", "tris", "succinate")
GRID = (
    "target_ph=5:7:0.02",
    "concentration_mmol_l=5:50:1",
    "temperature_c=2,5,25,40",
    "load_mmol_l=-2:2:0.2",
)


def cold(args: list[str], runs: int) -> tuple[float, float]:
    """Median processor and wall time of a command in new processes [s]."""
    processor, wall = [], []
    for _ in range(runs):
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        begin = time.perf_counter()
        subprocess.run(
            [sys.executable, "-m", "formbuf", *args],
            check=True,
            stdout=subprocess.DEVNULL,
        )
        wall.append(time.perf_counter() - begin)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
        used = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
        processor.append(used)
    return statistics.median(processor), statistics.median(wall)


def warm(work: Callable[[], object], runs: int) -> float:
    """Median processor time of a call in this process [s]."""
    times = []
    for _ in range(runs):
        begin = time.process_time()
        work()
        times.append(time.process_time() - begin)
    return statistics.median(times)


def commands(runs: int) -> None:
    """Cold commands on every example."""
    print("\n| command, cold | processor, s | wall, s |\n|---|---|---|")
    for path in sorted(EXAMPLES.glob("*.toml")):
        for extra in ([], ["--draws", "2500"]):
            used, wall = cold(["shortlist", str(path), *extra], runs)
            name = " ".join(["shortlist", path.name, *extra])
            print(f"| `{name}` | {used:.2f} | {wall:.2f} |")


def draws(runs: int) -> None:
    """How the cost of confidence grows with the draws."""
    found = shortlist(read_brief(EXAMPLES / "antibody.toml"), library())
    print("\n| draws (antibody example, warm) | processor, s | µs per draw |")
    print("|---|---|---|")
    for count in (250, 2500, 25_000, 250_000):
        used = warm(lambda count=count: with_confidence(found, draws=count), runs)
        print(f"| {count} | {used:.3f} | {1e6 * used / count:.1f} |")


def scans(runs: int) -> None:
    """States a minute of a scan, in the solver part."""
    completed = complete(read_brief(EXAMPLES / "antibody.toml"), library())
    case = case_for(completed)
    grid = grid_of([parse_axis(text) for text in GRID])
    print("\n| scan of states | states | processor, s | million states a minute |")
    print("|---|---|---|---|")
    for name in ("histidine_hydrochloride", "sodium_phosphate", "sodium_citrate"):
        scan = state_scan(case, [library().systems[name]], grid)

        def work(scan=scan) -> None:  # type: ignore[no-untyped-def]
            for _ in scan.chunks():
                pass

        used = warm(work, runs)
        rate = scan.size / used * 60 / 1e6
        print(f"| {name} | {scan.size} | {used:.2f} | {rate:.0f} |")


def _solve(species: int, states: int, temperatures: int) -> Callable[[], object]:
    """A call that solves mixtures of several species at several temperatures."""
    rng = np.random.default_rng(1)
    ladders = [ladder_of(library().species[name]) for name in SPECIES[:species]]
    totals = rng.uniform(0.001, 0.02, (states, species))
    charge = rng.uniform(0.0, 1.0, states) * totals.sum(axis=1)
    salt = rng.uniform(0.0, 0.15, states)
    at = np.linspace(0.0, 40.0, temperatures)

    def work() -> None:
        for t in at:
            solve(ladders, totals, charge, charge + 2.0 * salt, float(t))

    return work


def growth(runs: int) -> None:
    """How the solver's cost grows with states, species and temperatures."""
    print("\n| states | species | temperatures | processor, ms | µs a state |")
    print("|---|---|---|---|---|")
    cases = [(n, 1, 1) for n in (10, 1000, 10_000, 100_000, 1_000_000)]
    cases += [(100_000, species, 1) for species in (2, 4, 6)]
    cases += [(10_000, 1, temperatures) for temperatures in (10, 100)]
    for states, species, temperatures in cases:
        work = _solve(species, states, temperatures)
        work()
        used = warm(work, runs)
        each = 1e6 * used / (states * temperatures)
        print(
            f"| {states} | {species} | {temperatures} | {1e3 * used:.1f} | {each:.3f} |"
        )


def main() -> None:
    """Print every table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=5)
    parser.add_argument("--skip-cold", action="store_true")
    chosen = parser.parse_args()
    if not chosen.skip_cold:
        commands(chosen.runs)
    draws(chosen.runs)
    scans(chosen.runs)
    growth(chosen.runs)


if __name__ == "__main__":
    main()
