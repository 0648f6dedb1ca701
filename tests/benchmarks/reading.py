"""What it costs to read a long list, against the bare RDKit parse of the same SMILES.

    python tests/benchmarks/reading.py [ROWS]

The structures are made up: substituents on scaffolds, one row in ten a salt.
"""

from __future__ import annotations

import itertools
import resource
import sys
import tempfile
import time
from pathlib import Path

from rdkit import Chem

from libtool.blocks import read_blocks
from libtool.blocks.clean import parent_structure

SCAFFOLDS = ("N1CCC({})CC1", "NCc1ccc({})cc1", "Oc1cc({})ccc1", "c1c({})cn[nH]1", "Nc1ccc({})nc1", "OC(=O)c1cc({})cnc1")
GROUPS = ("C", "CC", "C(C)C", "OC", "F", "Cl", "C(F)(F)F", "C#N", "C(=O)OC", "S(C)(=O)=O", "N(C)C", "c1ccccc1", "C1CC1")
SALTS = ("", "", "", "", "", "", "", "", "", ".Cl")


def structures(rows: int) -> list[str]:
    """That many SMILES; chains between scaffold and group keep them different."""
    chains = ("C" * n for n in itertools.count())
    made = (
        scaffold.format(chain + group) + SALTS[i % len(SALTS)]
        for chain in chains
        for i, (scaffold, group) in enumerate(itertools.product(SCAFFOLDS, GROUPS))
    )
    # A chain of more than 30 atoms is no building block: start again with longer tails on both ends.
    return list(itertools.islice(made, min(rows, len(SCAFFOLDS) * len(GROUPS) * 30)))


def main() -> None:
    rows = int(sys.argv[1]) if len(sys.argv) > 1 else 2_000
    texts = structures(rows)
    start = time.perf_counter()
    for text in texts:
        Chem.MolFromSmiles(text)
    bare = time.perf_counter() - start
    start = time.perf_counter()
    for text in texts:
        parent_structure(text)
    cleaned = time.perf_counter() - start
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "list.csv"
        path.write_text("id,smiles,amount_mg\n" + "".join(f"R{i},{s},{i % 900 + 100}\n" for i, s in enumerate(texts)))
        start = time.perf_counter()
        blocks = read_blocks(path)
        read = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    print(f"{len(texts):,} rows; bare parse {len(texts) / bare:,.0f} rows/s")
    print(f"clean-up: {cleaned / bare:.1f} times the bare parse")
    print(f"reading with duplicates and amounts: {read / bare:.1f} times; {blocks.summary()}")
    print(f"peak memory {peak:,.0f} MB")


if __name__ == "__main__":
    main()
