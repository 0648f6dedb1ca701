"""What it costs to judge a pair, as ratios within one run.

    python tests/benchmarks/library.py

Prints the time per pair of the demo design, how much is saved by finding what
depends on one reagent only once, and what one 3D approach costs beside it.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from libtool.approach import approach
from libtool.blocks import BlockSet, read_blocks
from libtool.records import ElectrophileSite
from libtool.triage import build_library

DATA = Path(__file__).resolve().parents[2] / "data"
REPEATS = 3


def seconds(act: Callable[[], object]) -> float:
    """Shortest of a few runs."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        act()
        times.append(time.perf_counter() - start)
    return min(times)


def one_by_one(nucleophiles: BlockSet, electrophiles: BlockSet) -> None:
    """Each pair as if it were alone."""
    for n in nucleophiles:
        for e in electrophiles:
            build_library(replace(nucleophiles, blocks=(n,)), replace(electrophiles, blocks=(e,)))


def main() -> None:
    nucleophiles = read_blocks(DATA / "nucleophiles.csv")
    electrophiles = read_blocks(DATA / "electrophiles.csv")
    library = build_library(nucleophiles, electrophiles)
    together = seconds(lambda: build_library(nucleophiles, electrophiles))
    alone = seconds(lambda: one_by_one(nucleophiles, electrophiles))
    sites = [s for c in library.columns for s in c.sites[:1] if isinstance(s, ElectrophileSite)]
    pictures = seconds(lambda: [approach(s) for s in sites])
    print(f"{len(library)} pairs together: {1000 * together / len(library):.2f} ms a pair")
    print(f"each pair alone: {alone / together:.1f} times as long")
    print(f"one approach: {pictures / len(sites) / (together / len(library)):.0f} times a pair")


if __name__ == "__main__":
    main()
