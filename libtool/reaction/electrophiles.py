"""Electrophilic carbons of a block and the groups that leave them.

The leaving group is recognised by `leaving_group_patterns.csv`. It is then
replaced by a dummy atom, and everything said about the carbon (its class, its
branches, its neighbours) is read off that stripped molecule with
`carbon_patterns.csv`: a bromide and its mesylate are one carbon.

Poor leaving groups (alcohol, ester, ammonium, then ether and fluoride) and sp2
carbons count only when the block has nothing better, so that a bottle listed
by mistake is named and flagged instead of being overlooked.
"""

from __future__ import annotations

from functools import cache

from rdkit import Chem
from rdkit.Chem import rdMolDescriptors

from libtool.records import BuildingBlock, ElectrophileSite
from libtool.reference.tables import number, row, table

__all__ = ["carbon_atoms", "carbon_modifiers", "electrophile_sites", "good_leaving_bonds"]

# A hydrogen counts for nothing here; carbons that activate the C-X bond win
# over plain ones when one molecule carries two equal leaving groups.
_BLOCKED_PENALTY = -6.0
# Ethers and C-F bonds are parts of a scaffold: in 4-bromoanisole the bromide is
# what somebody meant, in 4-bromobenzyl alcohol the hydroxyl.
_SCAFFOLD_GROUPS = frozenset({"OR", "F"})


def electrophile_sites(block: BuildingBlock) -> tuple[ElectrophileSite, ...]:
    """Electrophilic carbons of a block, the most reactive first.

    Parameters
    ----------
    block : BuildingBlock

    Returns
    -------
    tuple of ElectrophileSite
        Empty when no known leaving group sits on carbon. Equivalent carbons
        appear once. Where any sp3 carbon carries a good leaving group, poor
        leaving groups and sp2 carbons are left out.
    """
    found: dict[str, ElectrophileSite] = {}
    for carbon, leaving, group in _leaving_groups(block.mol):
        site = _site(block, carbon, leaving, group)
        key = f"{group} {site.key}"
        if key not in found:
            found[key] = site
    sites = list(found.values())
    good = [s for s in sites if s.good_leaving_group and _is_sp3(s)]
    meant = [s for s in sites if _is_sp3(s) and s.leaving_group not in _SCAFFOLD_GROUPS]
    sp2 = [s for s in sites if s.good_leaving_group]
    chosen = good or meant or sp2 or sites
    return tuple(sorted(chosen, key=lambda s: (-s.log10_odds, s.carbon)))


def good_leaving_bonds(mol: Chem.Mol) -> tuple[tuple[int, int], ...]:
    """(carbon, first leaving atom) of every good leaving group on sp3 carbon, equivalent ones included."""
    return tuple(
        (carbon, leaving)
        for carbon, leaving, group in _leaving_groups(mol)
        if row("leaving_group_patterns", group)["grade"] == "good"
        and mol.GetAtomWithIdx(carbon).GetHybridization() == Chem.HybridizationType.SP3
    )


def carbon_modifiers(site: ElectrophileSite) -> tuple[str, ...]:
    """Keys of the `carbon_patterns.csv` rows of kind "modifier" that apply to a site's carbon."""
    return tuple(
        key
        for key, kind, pattern in _carbon_patterns()
        if kind == "modifier" and _match_at_carbon(site.stripped, pattern)
    )


def carbon_atoms(site: ElectrophileSite, pattern: Chem.Mol) -> tuple[int, ...] | None:
    """Atoms of the block that a pattern covers when it starts at the leaving group and the carbon.

    Parameters
    ----------
    site : ElectrophileSite
    pattern : rdkit.Chem.Mol
        SMARTS whose first atom is the dummy and second the attacked carbon.

    Returns
    -------
    tuple of int or None
        Indices in `site.block.mol`, the leaving atom first; None where the
        pattern does not apply.
    """
    match = _match_at_carbon(site.stripped, pattern)
    return tuple(site.stripped_atoms[i] for i in match) if match else None


def _match_at_carbon(stripped: Chem.Mol, pattern: Chem.Mol) -> tuple[int, ...] | None:
    found = stripped.GetSubstructMatches(pattern, maxMatches=10_000, uniquify=False)
    return next((m for m in found if m[:2] == (0, 1)), None)


def _is_sp3(site: ElectrophileSite) -> bool:
    carbon = site.block.mol.GetAtomWithIdx(site.carbon)
    return carbon.GetHybridization() == Chem.HybridizationType.SP3


@cache
def _leaving_group_patterns() -> tuple[tuple[str, Chem.Mol], ...]:
    # The most specific pattern has the most atoms: a tosylate is also "other
    # sulfonate", so the larger pattern is tried first.
    rows = [(r["key"], Chem.MolFromSmarts(r["smarts"])) for r in table("leaving_group_patterns")]
    return tuple(sorted(rows, key=lambda pair: (-pair[1].GetNumAtoms(), pair[0])))


@cache
def _carbon_patterns() -> tuple[tuple[str, str, Chem.Mol], ...]:
    rows = sorted(table("carbon_patterns"), key=lambda r: (int(r["precedence"]), r["key"]))
    return tuple((r["key"], r["kind"], Chem.MolFromSmarts(r["smarts"])) for r in rows)


def _leaving_groups(mol: Chem.Mol) -> list[tuple[int, int, str]]:
    """(carbon, first leaving atom, leaving group) of every bond that can break."""
    groups: dict[tuple[int, int], str] = {}
    for key, pattern in _leaving_group_patterns():
        for match in mol.GetSubstructMatches(pattern, maxMatches=10_000, uniquify=False):
            groups.setdefault((match[0], match[1]), key)
    return [(carbon, leaving, key) for (carbon, leaving), key in sorted(groups.items())]


def _departing_atoms(mol: Chem.Mol, carbon: int, leaving: int) -> tuple[int, ...]:
    """Atoms on the leaving side of the breaking bond, the bonded one first."""
    seen, stack = [leaving], [leaving]
    while stack:
        here = stack.pop()
        for neighbour in mol.GetAtomWithIdx(here).GetNeighbors():
            index = neighbour.GetIdx()
            if index not in seen and not (here == leaving and index == carbon):
                seen.append(index)
                stack.append(index)
    return tuple(seen)


def _site(block: BuildingBlock, carbon: int, leaving: int, group: str) -> ElectrophileSite:
    departing = _departing_atoms(block.mol, carbon, leaving)
    stripped, atoms = _strip(block.mol, carbon, departing)
    carbon_class = _carbon_class(stripped)
    group_row = row("leaving_group_patterns", group)
    class_row = row("carbon_patterns", carbon_class)
    odds = number(group_row, "log10_odds")
    odds += _BLOCKED_PENALTY if class_row["kind"] == "blocked" else number(class_row, "log10_odds")
    for key, kind, pattern in _carbon_patterns():
        if kind == "modifier" and _match_at_carbon(stripped, pattern):
            odds += number(row("carbon_patterns", key), "log10_odds")
    return ElectrophileSite(
        block=block,
        carbon=carbon,
        leaving_group=group,
        leaving_atoms=departing,
        key=Chem.MolToSmiles(stripped),
        carbon_class=carbon_class,
        good_leaving_group=group_row["grade"] == "good",
        log10_odds=odds,
        stripped=stripped,
        stripped_atoms=atoms,
    )


def _strip(mol: Chem.Mol, carbon: int, departing: tuple[int, ...]) -> tuple[Chem.Mol, tuple[int, ...]]:
    """Molecule with a dummy for the leaving group: dummy first, carbon second.

    The leaving atom is turned into the dummy where it stands, so that bond
    order and chirality tags keep their meaning.
    """
    marked = Chem.RWMol(mol)
    dummy = marked.GetAtomWithIdx(departing[0])
    dummy.SetAtomicNum(0)
    dummy.SetFormalCharge(0)
    dummy.SetNumExplicitHs(0)
    dummy.SetNoImplicit(True)
    dummy.SetIsotope(0)
    marked.BeginBatchEdit()
    for index in departing[1:]:
        marked.RemoveAtom(index)
    marked.CommitBatchEdit()
    kept = [i for i in range(mol.GetNumAtoms()) if i not in departing[1:]]
    order = [kept.index(departing[0]), kept.index(carbon)]
    order += [i for i in range(len(kept)) if i not in order]
    stripped = Chem.RenumberAtoms(marked.GetMol(), order)
    Chem.SanitizeMol(stripped)
    Chem.AssignStereochemistry(stripped, cleanIt=True, force=True)
    return stripped, tuple(kept[i] for i in order)


def _carbon_class(stripped: Chem.Mol) -> str:
    """First row of `carbon_patterns.csv`, by precedence, that describes the carbon."""
    bridgeheads: list[int] = []
    # The stub takes the list to be filled for another type.
    rdMolDescriptors.CalcNumBridgeheadAtoms(stripped, bridgeheads)  # type: ignore[arg-type]
    if 1 in bridgeheads:
        return "bridgehead"
    for key, kind, pattern in _carbon_patterns():
        if kind != "modifier" and key != "bridgehead" and _match_at_carbon(stripped, pattern):
            return key
    return "other"
