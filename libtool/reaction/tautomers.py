"""Prototropic forms of a nucleophile, one hydrogen moved at a time.

A pyrazole reacts at either nitrogen whichever one carries the hydrogen in the
drawing, and a pyridone at oxygen as well. Each form names the atom that
received the hydrogen, so that it can be looked at as a site of its own. Only
shifts inside one aromatic ring system, between a ring NH and its exocyclic
oxygen or sulfur, and within a thioamide or thioacid are made; they cover the classes of
`site_patterns.csv`.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from rdkit import Chem, rdBase

__all__ = ["Form", "prototropic_forms"]

_RING_SYSTEM_BOND = Chem.BondType.AROMATIC


@dataclass(frozen=True, slots=True)
class Form:
    """One tautomer and the atom (index as in the drawing) that gained the hydrogen."""

    mol: Chem.Mol
    atom: int


def prototropic_forms(mol: Chem.Mol) -> list[Form]:
    """Tautomers of a molecule that differ by one moved hydrogen.

    Parameters
    ----------
    mol : rdkit.Chem.Mol
        Sanitised; not changed. Atom indices stay the same in every form.

    Returns
    -------
    list of Form
        Without the drawing itself; empty where nothing can move.
    """
    forms: list[Form] = []
    for donor, acceptor in _shifts(mol):
        moved = _move_hydrogen(mol, donor, acceptor)
        if moved is not None:
            forms.append(Form(moved, acceptor))
    return forms


def _shifts(mol: Chem.Mol) -> Iterator[tuple[int, int]]:
    for system in _aromatic_systems(mol):
        atoms = [mol.GetAtomWithIdx(i) for i in system]
        ring_nh = [a.GetIdx() for a in atoms if a.GetAtomicNum() == 7 and a.GetTotalNumHs() == 1]
        ring_n = [
            a.GetIdx()
            for a in atoms
            if a.GetAtomicNum() == 7 and a.GetDegree() == 2 and not a.GetTotalNumHs() and not a.GetFormalCharge()
        ]
        oxo, hydroxy = _exocyclic_chalcogens(atoms)
        for donor in ring_nh:
            for acceptor in ring_n + oxo:
                yield donor, acceptor
        for donor in hydroxy:
            for acceptor in ring_n:
                yield donor, acceptor
    for match in mol.GetSubstructMatches(_THIOCARBONYL):
        yield match[2], match[0]


_THIOCARBONYL = Chem.MolFromSmarts("[SX1]=[CX3]-[NX3,OX2;!H0]")


def _aromatic_systems(mol: Chem.Mol) -> list[set[int]]:
    """Atom sets connected through aromatic bonds."""
    seen: set[int] = set()
    systems: list[set[int]] = []
    for atom in mol.GetAtoms():
        if not atom.GetIsAromatic() or atom.GetIdx() in seen:
            continue
        system, stack = set[int](), [atom.GetIdx()]
        while stack:
            here = stack.pop()
            if here in system:
                continue
            system.add(here)
            stack.extend(
                bond.GetOtherAtomIdx(here)
                for bond in mol.GetAtomWithIdx(here).GetBonds()
                if bond.GetBondType() == _RING_SYSTEM_BOND
            )
        seen |= system
        systems.append(system)
    return systems


def _exocyclic_chalcogens(atoms: list[Chem.Atom]) -> tuple[list[int], list[int]]:
    """Oxygen and sulfur on an aromatic carbon: double-bonded ones, and those with a hydrogen."""
    oxo: list[int] = []
    hydroxy: list[int] = []
    for atom in atoms:
        if atom.GetAtomicNum() != 6:
            continue
        for bond in atom.GetBonds():
            other = bond.GetOtherAtom(atom)
            if other.GetAtomicNum() not in (8, 16) or other.GetDegree() != 1 or other.GetFormalCharge():
                continue
            if bond.GetBondType() == Chem.BondType.DOUBLE:
                oxo.append(other.GetIdx())
            elif other.GetTotalNumHs() == 1:
                hydroxy.append(other.GetIdx())
    return oxo, hydroxy


def _move_hydrogen(mol: Chem.Mol, donor: int, acceptor: int) -> Chem.Mol | None:
    """Copy of the molecule with a hydrogen moved, or None where no structure can be drawn."""
    moved = Chem.RWMol(mol)
    _flip_exocyclic_bond(moved, donor)
    _flip_exocyclic_bond(moved, acceptor)
    giver, taker = moved.GetAtomWithIdx(donor), moved.GetAtomWithIdx(acceptor)
    for atom, hydrogens in ((giver, giver.GetTotalNumHs() - 1), (taker, 1)):
        atom.SetNoImplicit(True)
        atom.SetNumExplicitHs(max(hydrogens, 0))
    if moved.GetAtomWithIdx(acceptor).GetAtomicNum() == 16 and not moved.GetAtomWithIdx(acceptor).GetIsAromatic():
        _close_thiocarbonyl(moved, donor, acceptor)
    with rdBase.BlockLogs():
        if Chem.SanitizeMol(moved, catchErrors=True) != Chem.SanitizeFlags.SANITIZE_NONE:
            return None
    return moved.GetMol()


def _flip_exocyclic_bond(mol: Chem.RWMol, index: int) -> None:
    """Make C=O single or C-OH double for a chalcogen on an aromatic ring; leave ring atoms alone."""
    atom = mol.GetAtomWithIdx(index)
    if atom.GetIsAromatic() or atom.GetDegree() != 1:
        return
    bond = atom.GetBonds()[0]
    if bond.GetOtherAtom(atom).GetIsAromatic():
        single = bond.GetBondType() == Chem.BondType.SINGLE
        bond.SetBondType(Chem.BondType.DOUBLE if single else Chem.BondType.SINGLE)


def _close_thiocarbonyl(mol: Chem.RWMol, donor: int, acceptor: int) -> None:
    """Turn S=C-NH into HS-C=N, or S=C-OH into HS-C=O, where the carbon is not aromatic."""
    carbon = mol.GetAtomWithIdx(acceptor).GetNeighbors()[0]
    if carbon.GetIsAromatic():
        return
    mol.GetBondBetweenAtoms(acceptor, carbon.GetIdx()).SetBondType(Chem.BondType.SINGLE)
    mol.GetBondBetweenAtoms(donor, carbon.GetIdx()).SetBondType(Chem.BondType.DOUBLE)
