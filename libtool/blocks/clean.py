"""The parent structure of a drawn row: parse, split salts, neutralise.

The order is fixed: parse; disconnect metals; split off counter-ions and
solvents known to `counterions.csv`; neutralise, which leaves quaternary
nitrogen charged; drop explicit hydrogens that carry no label. What cannot be
one compound is refused with a sentence rather than guessed.
"""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass
from functools import cache

from rdkit import Chem, rdBase
from rdkit.Chem.MolStandardize import rdMolStandardize

from libtool.reference.tables import table

__all__ = ["Parent", "Refusal", "counterion_name", "identity", "parent_structure"]

_LONGEST_TEXT = 20_000
_MOST_FRAGMENTS = 20
_MOST_HEAVY_ATOMS = 150
# One neutral, unlabelled, metal-free component: four rows of five of a vendor
# list. Nothing but parsing is left to do for it.
_PLAIN = re.compile(
    r"(?:[BCNOPSFIbcnops]|Cl|Br|[=#/\\()0-9%]|\[(?:nH|C@@?H?|Si)\]|\[N\+\]\(=O\)\[O-\]|\[O-\]\[N\+\]\(=O\))+"
)
# Elements that form organometallic reagents: groups 1 and 2, the d block with
# zinc, cadmium and mercury, and the metals of groups 13 and 14.
_METALS = frozenset({3, 4, 11, 12, 13, 19, 20, *range(21, 31), 31, 37, 38, *range(39, 51), 55, 56, *range(57, 84)})


@dataclass(frozen=True, slots=True)
class Parent:
    """The cleaned structure and what was taken off."""

    mol: Chem.Mol
    smiles: str
    counterions: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Refusal:
    """Why a structure cannot be used, and what to do."""

    reason: str
    remedy: str


def parent_structure(text: str) -> Parent | Refusal:
    """Parent structure of a SMILES or a mol block.

    Parameters
    ----------
    text : str
        SMILES (a trailing name after a blank is ignored), InChI, or a
        V2000/V3000 block.

    Returns
    -------
    Parent or Refusal
        Parent.smiles is canonical and isomeric; counterions are canonical
        SMILES, one entry per component.

    Notes
    -----
    Parsing, metal disconnection and neutralisation are RDKit's.
    """
    refusal = _refuse_text(text)
    if refusal:
        return refusal
    with rdBase.BlockLogs():
        if _PLAIN.fullmatch(text.strip()) and (plain := Chem.MolFromSmiles(text.strip())) is not None:
            return _finished(plain, ())
        mol = _parse(text)
        if isinstance(mol, Refusal):
            return mol
        if metal := _carbon_bound_metal(mol):
            return Refusal(
                f"a carbon-{metal} bond: organometallic reagents are no partners of an SN2 alkylation plate",
                "Take it off the list, or list the compound it is made from",
            )
        mol = rdMolStandardize.MetalDisconnector().Disconnect(mol)
        fragments = Chem.GetMolFrags(mol, asMols=True)
        if len(fragments) > _MOST_FRAGMENTS:
            return Refusal(
                f"the structure has {len(fragments)} separate parts",
                "Give one compound a row, with its salt at most",
            )
        split = _split_counterions(fragments)
        if isinstance(split, Refusal):
            return split
        parent, counterions = split
        parent = rdMolStandardize.Uncharger().uncharge(parent)
        parent = Chem.RemoveHs(parent)
        return _checked(parent, counterions)


def identity(parent: Parent) -> str:
    """Key that two drawings of one compound share: the standard InChIKey.

    It does not tell apart tautomers that differ by a mobile hydrogen
    (3- and 5-methylpyrazole), which is what a bottle does not either. Where
    InChI has no answer the SMILES stands in.
    """
    with rdBase.BlockLogs():
        key = Chem.MolToInchiKey(parent.mol)  # type: ignore[no-untyped-call]
    return str(key) or parent.smiles


def counterion_name(smiles: str) -> str:
    """Name of a salt or solvent component, such as "hydrogen chloride"; the SMILES where it has none."""
    with rdBase.BlockLogs():
        mol = _read(smiles, sanitise=True)
        return smiles if mol is None else _known_counterions().get(_neutral_key(mol), smiles)


def _carbon_bound_metal(mol: Chem.Mol) -> str:
    """Symbol of a metal bonded to carbon, or empty."""
    for atom in mol.GetAtoms():
        if atom.GetAtomicNum() in _METALS and any(n.GetAtomicNum() == 6 for n in atom.GetNeighbors()):
            return str(atom.GetSymbol())
    return ""


def _refuse_text(text: str) -> Refusal | None:
    if not text.strip():
        return Refusal("the structure cell is empty", "Fill in a SMILES or remove the row")
    if len(text) > _LONGEST_TEXT:
        return Refusal(
            f"the structure text is {len(text):,} characters long (limit {_LONGEST_TEXT:,})",
            "Building blocks are small molecules: check that the cell holds one structure",
        )
    return None


def _read(text: str, *, sanitise: bool) -> Chem.Mol | None:
    if "\n" in text:
        # Wedges and double-bond geometry are perceived only while sanitising.
        return Chem.MolFromMolBlock(text, sanitize=sanitise, removeHs=False)
    if text.strip().startswith("InChI="):
        found: Chem.Mol | None = Chem.MolFromInchi(  # type: ignore[no-untyped-call]
            text.strip(), sanitize=sanitise, removeHs=False
        )
        return found
    params = Chem.SmilesParserParams()
    # The stubs of RDKit 2026.9 give the settings the type of their owner.
    params.sanitize = sanitise  # type: ignore[assignment]
    params.removeHs = False  # type: ignore[assignment]
    return Chem.MolFromSmiles(text.strip().split()[0], params)


def _parse(text: str) -> Chem.Mol | Refusal:
    if "\n" not in text and ">" in text.strip().split()[0]:
        return Refusal("this is a reaction, not a compound", "Give the SMILES of one reagent")
    mol = _read(text, sanitise=False)
    if mol is None:
        return Refusal(
            "the text is not a valid structure (a bracket or ring does not close, or an atom symbol does not exist)",
            "Draw the compound again and paste its SMILES",
        )
    if mol.GetNumAtoms() == 0:
        return Refusal("the structure has no atoms", "Draw the compound or remove the row")
    problems = Chem.DetectChemistryProblems(mol)
    if problems:
        return Refusal(
            f"the structure breaks a valence or aromaticity rule ({problems[0].Message()})",
            "Correct the charge, the hydrogens or the ring in the drawing",
        )
    if any(a.GetAtomicNum() == 0 for a in mol.GetAtoms()):
        return Refusal(
            "the structure holds a placeholder atom (*, R group or polymer bond)", "Draw one defined compound"
        )
    mol = _read(text, sanitise=True)
    if mol is None:
        return Refusal(
            "the structure cannot be sanitised",
            "Correct the charge, the hydrogens or the ring in the drawing",
        )
    _plain_labels(mol)
    return mol


def _plain_labels(mol: Chem.Mol) -> None:
    """Drop atom map numbers, and turn deuterium on N, O and S into hydrogen.

    A map number is bookkeeping of another program; an exchangeable label is
    lost in the first drop of base.
    """
    for atom in mol.GetAtoms():
        atom.SetAtomMapNum(0)
        if atom.GetAtomicNum() == 1 and any(n.GetAtomicNum() in (7, 8, 16) for n in atom.GetNeighbors()):
            atom.SetIsotope(0)


@cache
def _known_counterions() -> dict[str, str]:
    """Name of each known component by its neutral SMILES."""
    return {
        _neutral_key(Chem.MolFromSmiles(row["smiles"])): row["key"].replace("_", " ") for row in table("counterions")
    }


def _neutral_key(fragment: Chem.Mol) -> str:
    """Canonical SMILES of a component without charges that protons explain."""
    return Chem.MolToSmiles(rdMolStandardize.Uncharger().uncharge(Chem.RemoveHs(fragment)))


def _split_counterions(fragments: tuple[Chem.Mol, ...]) -> tuple[Chem.Mol, tuple[str, ...]] | Refusal:
    keys = [_neutral_key(f) for f in fragments]
    known = _known_counterions()
    kept = [i for i, key in enumerate(keys) if key not in known]
    if not kept:
        # Everything is a salt former: sodium acetate, ammonium bromide, plain
        # acetic acid. The largest component that holds carbon is the reagent.
        kept = [max(range(len(fragments)), key=lambda i: (_has_carbon(fragments[i]), fragments[i].GetNumAtoms()))]
    distinct = Counter(keys[i] for i in kept)
    if len(distinct) > 1:
        shown = " and ".join(sorted(distinct)[:3])
        return Refusal(
            f"the row holds {len(distinct)} different compounds ({shown}), and none is a known salt former or solvent",
            "Give each compound a row of its own, or draw the counter-ion as an ion",
        )
    parent = kept[0]
    counterions = tuple(sorted(Chem.MolToSmiles(f) for i, f in enumerate(fragments) if i not in kept))
    return fragments[parent], counterions


def _has_carbon(mol: Chem.Mol) -> bool:
    return any(a.GetAtomicNum() == 6 for a in mol.GetAtoms())


def _checked(parent: Chem.Mol, counterions: tuple[str, ...]) -> Parent | Refusal:
    if not _has_carbon(parent) and parent.GetNumHeavyAtoms() == 1 and parent.GetAtomWithIdx(0).GetAtomicNum() != 7:
        return Refusal("the row holds a bare atom or ion, not a building block", "Remove the row")
    if any(a.GetNumRadicalElectrons() for a in parent.GetAtoms()):
        return Refusal("the structure has an unpaired electron", "Add the missing hydrogen or charge")
    return _finished(parent, counterions)


def _finished(parent: Chem.Mol, counterions: tuple[str, ...]) -> Parent | Refusal:
    if parent.GetNumHeavyAtoms() > _MOST_HEAVY_ATOMS:
        return Refusal(
            f"the molecule has {parent.GetNumHeavyAtoms()} heavy atoms (limit {_MOST_HEAVY_ATOMS})",
            "Building blocks are small molecules: check the row",
        )
    smiles = Chem.MolToSmiles(parent)
    # A second reading fixes the atom order, so that equal parents are equal
    # molecules whatever the drawing looked like.
    again = _read(smiles, sanitise=True)
    if again is None:
        return Refusal("RDKit cannot read back its own canonical form of this structure", "Report the row to us")
    return Parent(again, Chem.MolToSmiles(again), counterions)
