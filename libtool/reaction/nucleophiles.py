"""Nucleophilic sites of a block.

Every atom that a pattern of `site_patterns.csv` recognises is a site, in the
drawing or in a form with one hydrogen moved. Sites that give the same
products share a key and appear once. The preference of a site is the sum of
the preference of its class and of the regiochemistry of azoles and azinones,
both log10 of odds from `site_patterns.csv` and `regiochemistry.csv`.
"""

from __future__ import annotations

from functools import cache

from rdkit import Chem

from libtool.reaction.tautomers import prototropic_forms
from libtool.records import BuildingBlock, NucleophileSite
from libtool.reference.tables import number, row, table

__all__ = ["nucleophile_sites", "release_hydrogen", "site_label"]


def nucleophile_sites(block: BuildingBlock) -> tuple[NucleophileSite, ...]:
    """Nucleophilic sites of a block, the most reactive first.

    Whether the base can deprotonate a site is not asked here; see
    `rate.estimate_rate`.

    Parameters
    ----------
    block : BuildingBlock

    Returns
    -------
    tuple of NucleophileSite
        Empty when nothing reacts. Equivalent atoms appear once.

    Notes
    -----
    Class order: common practice, checked against recorded alkylations (see
    `tests/literature`). Regiochemistry: counts in recorded alkylations
    [@lowe_2017_uspto].
    """
    found: dict[str, NucleophileSite] = {}
    drawn = [(block.mol, atom, kind) for atom, kind in _matches(block.mol).items()]
    shifted = [
        (form.mol, form.atom, kind)
        for form in prototropic_forms(block.mol)
        if (kind := _matches(form.mol).get(form.atom))
    ]
    for form, atom, kind in drawn + shifted:
        key = _key(form, atom)
        odds = number(row("site_patterns", kind), "log10_odds") + _regiochemistry(form, atom)
        hydrogens = form.GetAtomWithIdx(atom).GetTotalNumHs()
        site = NucleophileSite(
            block=block, kind=kind, atom=atom, key=key, log10_odds=odds, hydrogens=hydrogens, form=form
        )
        if key not in found or found[key].log10_odds < odds:
            found[key] = site
    return tuple(sorted(found.values(), key=lambda s: (-s.log10_odds, s.atom)))


def site_label(site: NucleophileSite) -> str:
    """Class of a site in words, with the atom counted from 1, for instance "phenol (atom O7)"."""
    symbol = site.form.GetAtomWithIdx(site.atom).GetSymbol()
    return f"{row('site_patterns', site.kind)['label']} (atom {symbol}{site.atom + 1})"


@cache
def _patterns() -> tuple[tuple[str, Chem.Mol], ...]:
    """Pattern of each class, the most preferred class first."""
    rows = sorted(table("site_patterns"), key=lambda r: -number(r, "log10_odds"))
    return tuple((r["key"], Chem.MolFromSmarts(r["smarts"])) for r in rows)


def _matches(mol: Chem.Mol) -> dict[int, str]:
    """Class of each recognised atom; the most preferred class wins."""
    kinds: dict[int, str] = {}
    for kind, pattern in _patterns():
        # Not uniquified: a pattern that reads the same backwards fits either end.
        for match in mol.GetSubstructMatches(pattern, maxMatches=10_000, uniquify=False):
            kinds.setdefault(match[0], kind)
    return kinds


def _key(form: Chem.Mol, atom: int) -> str:
    """Canonical SMILES with a dummy atom where the lost hydrogen was."""
    marked = Chem.RWMol(form)
    release_hydrogen(marked, atom)
    dummy = marked.AddAtom(Chem.Atom(0))
    marked.AddBond(atom, dummy, Chem.BondType.SINGLE)
    Chem.SanitizeMol(marked)
    Chem.AssignStereochemistry(marked, cleanIt=True, force=True)
    return Chem.MolToSmiles(marked)


def release_hydrogen(mol: Chem.RWMol, index: int) -> None:
    """Take one hydrogen off an atom of an editable molecule, in place.

    A carbon that gives up its only hydrogen goes through a planar anion, so
    its chirality is cleared.
    """
    atom = mol.GetAtomWithIdx(index)
    if atom.GetNumExplicitHs():
        atom.SetNumExplicitHs(atom.GetNumExplicitHs() - 1)
    if atom.GetAtomicNum() == 6:
        atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)


@cache
def _regiochemistry_patterns() -> tuple[tuple[str, Chem.Mol], ...]:
    # Each pattern starts at the nitrogen (or oxygen) that would be alkylated.
    smarts = {
        "azole_away_from_fusion": "[n;r5;!$(n:[c;R2])]1:a:[a;R2]:[a;R2]:a1",
        "azole_flanked_by_carbons": "[n;r5]1:[c;!R2]:n:n:[c;!R2]1",
        "purine_n7": "[n;r5]1:[c;R2;!$(c(:[n;r6]):n)]:[c;R2;$(c:[n;r6])]:[n;r5]:c1",
        "xanthine_n9": "[n;r5]1:[c;R2;$(c:[nX3;r6])]:[c;R2;$(c:c=[O,S])]:[n;r5]:c1",
        "azinone_away_from_carbonyl": "[nX3;H1;r6;!$(n:c=[O,S])]1:[c;!R2]:n:c(=[O,S]):a:a1",
        "azinone_oxygen": "[OX2;H1]-[c;$(c:n),$(c1aanaa1)]",
    }
    return tuple((key, Chem.MolFromSmarts(text)) for key, text in smarts.items())


def _regiochemistry(form: Chem.Mol, index: int) -> float:
    """Sum of the azole and azinone rules that apply to an atom, log10 odds."""
    atom = form.GetAtomWithIdx(index)
    total = 0.0
    for key, pattern in _regiochemistry_patterns():
        if any(match[0] == index for match in form.GetSubstructMatches(pattern, uniquify=False)):
            total += number(row("regiochemistry", key), "log10_odds")
    if atom.GetIsAromatic() and atom.GetAtomicNum() == 7:
        total += _crowding(form, atom) * number(row("regiochemistry", "azole_substituted_neighbour"), "log10_odds")
    return total


def _crowding(form: Chem.Mol, nitrogen: Chem.Atom) -> int:
    """Exocyclic substituents on the ring atoms next to a five-ring nitrogen."""
    if not form.GetRingInfo().IsAtomInRingOfSize(nitrogen.GetIdx(), 5):
        return 0
    return sum(
        1
        for neighbour in nitrogen.GetNeighbors()
        for bond in neighbour.GetBonds()
        if not bond.IsInRing() and bond.GetOtherAtom(neighbour).GetAtomicNum() > 1
    )
