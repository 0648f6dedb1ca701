"""Products of a pair: two blocks joined, the attacked carbon inverted.

The new bond takes the place of the old one in the neighbour order of the
carbon, and the chirality tag is turned over: that is inversion, exact for the
molecule as a whole whatever the CIP labels do. An undefined centre stays
undefined. Products that are one molecule are one product.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

from rdkit import Chem
from rdkit.Chem import rdMolDescriptors

from libtool.errors import ChemistryError
from libtool.reaction.electrophiles import electrophile_sites
from libtool.reaction.nucleophiles import nucleophile_sites, release_hydrogen, site_label
from libtool.records import BuildingBlock, Confidence, ElectrophileSite, NucleophileSite, Product
from libtool.reference.tables import row

__all__ = ["join", "make_products", "products_of_sites"]

# Odds of 9:1 and of 3:2: below the first a chemist checks the NMR, below the
# second the record is a coin toss. Common practice, no source.
_CLEAR, _TOSS = 0.9, 0.6

_MIRROR = {
    Chem.ChiralType.CHI_TETRAHEDRAL_CW: Chem.ChiralType.CHI_TETRAHEDRAL_CCW,
    Chem.ChiralType.CHI_TETRAHEDRAL_CCW: Chem.ChiralType.CHI_TETRAHEDRAL_CW,
}


def make_products(nucleophile: BuildingBlock, electrophile: BuildingBlock) -> tuple[Product, ...]:
    """Every monoalkylation product of a pair, the likeliest first.

    Parameters
    ----------
    nucleophile, electrophile : BuildingBlock

    Returns
    -------
    tuple of Product
        Empty when one of the blocks has no site. Probabilities add up to 1.

    Examples
    --------
    >>> import pandas
    >>> from libtool.blocks import read_blocks
    >>> pair = read_blocks(pandas.DataFrame({"id": ["N", "E"], "smiles": ["c1cn[nH]c1", "C[C@H](Br)C(=O)OC"]}))
    >>> [(p.smiles, p.stereo) for p in make_products(pair["N"], pair["E"])]
    [('COC(=O)[C@@H](C)n1cccn1', 'inverted')]
    """
    return products_of_sites(nucleophile_sites(nucleophile), electrophile_sites(electrophile))


def products_of_sites(n_sites: Sequence[NucleophileSite], e_sites: Sequence[ElectrophileSite]) -> tuple[Product, ...]:
    """Products of two sets of sites, for callers that found the sites before; see `make_products`."""
    sites = [(n, e) for n in n_sites for e in e_sites]
    weight: dict[str, float] = {}
    best: dict[str, tuple[NucleophileSite, ElectrophileSite, Chem.Mol]] = {}
    for n_site, e_site in sites:
        mol = join(n_site, e_site)
        smiles = Chem.MolToSmiles(mol)
        weight[smiles] = weight.get(smiles, 0.0) + 10.0 ** (n_site.log10_odds + e_site.log10_odds)
        best.setdefault(smiles, (n_site, e_site, mol))
    total = sum(weight.values())
    order = sorted(weight, key=lambda s: (-weight[s], s))
    shares = [weight[s] / total for s in order]
    products: list[Product] = []
    for rank, (smiles, share) in enumerate(zip(order, shares, strict=True), start=1):
        n_site, e_site, mol = best[smiles]
        products.append(
            Product(
                nucleophile=n_site,
                electrophile=e_site,
                smiles=smiles,
                rank=rank,
                probability=share,
                confidence=_confidence(shares),
                reason=_reason([best[s] for s in order], shares),
                stereo=_stereo(e_site),
                formula=rdMolDescriptors.CalcMolFormula(mol),
                exact_mass=rdMolDescriptors.CalcExactMolWt(mol),
            )
        )
    return tuple(products)


def join(nucleophile: NucleophileSite, electrophile: ElectrophileSite) -> Chem.Mol:
    """Product molecule of two sites, inverted at the attacked carbon.

    Parameters
    ----------
    nucleophile : NucleophileSite
    electrophile : ElectrophileSite

    Returns
    -------
    rdkit.Chem.Mol
        Sanitised, stereochemistry assigned. Each atom carries the properties
        ``libtool_role`` ("nucleophile" or "electrophile") and
        ``libtool_atom`` (its index in that block).

    Raises
    ------
    ChemistryError
        The product breaks a valence rule.
    """
    left, right = (
        _labelled(nucleophile.form, "nucleophile"),
        _labelled(electrophile.block.mol, "electrophile"),
    )
    both = Chem.RWMol(Chem.CombineMols(left, right))
    shift = left.GetNumAtoms()
    carbon, leaving = electrophile.carbon + shift, electrophile.leaving_atoms[0] + shift
    tag = _inverted_tag(electrophile)
    release_hydrogen(both, nucleophile.atom)
    both.RemoveBond(carbon, leaving)
    both.AddBond(nucleophile.atom, carbon, Chem.BondType.SINGLE)
    both.GetAtomWithIdx(carbon).SetChiralTag(tag)
    both.BeginBatchEdit()
    for index in electrophile.leaving_atoms:
        both.RemoveAtom(index + shift)
    both.CommitBatchEdit()
    try:
        Chem.SanitizeMol(both)
    except Chem.MolSanitizeException as error:
        raise ChemistryError(
            f"{nucleophile.block.id} + {electrophile.block.id}: the product breaks a valence rule ({error}). "
            "Check both structures."
        ) from error
    Chem.AssignStereochemistry(both, cleanIt=True, force=True)
    return both.GetMol()


def _labelled(mol: Chem.Mol, role: str) -> Chem.Mol:
    copy = Chem.Mol(mol)
    for atom in copy.GetAtoms():
        atom.SetProp("libtool_role", role)
        atom.SetIntProp("libtool_atom", atom.GetIdx())
    return copy


def _inverted_tag(site: ElectrophileSite) -> Chem.ChiralType:
    """Chirality tag of the carbon once the nucleophile is its last neighbour.

    The tag counts neighbours in bond order. Taking the leaving atom out at
    position p of n and putting the nucleophile in at the end is n-1-p
    exchanges; an odd number turns the tag over, and inversion turns it over
    once more.
    """
    carbon = site.block.mol.GetAtomWithIdx(site.carbon)
    tag = carbon.GetChiralTag()
    if tag not in _MIRROR:
        return Chem.ChiralType.CHI_UNSPECIFIED
    order = [bond.GetOtherAtomIdx(site.carbon) for bond in carbon.GetBonds()]
    exchanges = len(order) - 1 - order.index(site.leaving_atoms[0])
    return tag if exchanges % 2 else _MIRROR[tag]


def _stereo(site: ElectrophileSite) -> str:
    carbon = site.block.mol.GetAtomWithIdx(site.carbon)
    if carbon.GetChiralTag() in _MIRROR:
        return "inverted"
    return "undefined" if site.carbon in _possible_centres(site.block.smiles) else "none"


@cache
def _possible_centres(smiles: str) -> frozenset[int]:
    centres = Chem.FindMolChiralCenters(  # type: ignore[no-untyped-call]
        Chem.MolFromSmiles(smiles), includeUnassigned=True, useLegacyImplementation=False
    )
    return frozenset(index for index, _ in centres)


def _confidence(shares: list[float]) -> Confidence:
    if shares[0] >= _CLEAR:
        return Confidence.CLEAR
    return Confidence.AMBIGUOUS if shares[0] >= _TOSS else Confidence.UNRESOLVED


def _reason(ranked: list[tuple[NucleophileSite, ElectrophileSite, Chem.Mol]], shares: list[float]) -> str:
    """One sentence on why the first product comes first."""
    n_site, e_site, _ = ranked[0]
    if len(ranked) == 1:
        return f"only one product can form: {site_label(n_site)} reacts"
    n_next, e_next, _ = ranked[1]
    if n_next.key != n_site.key:
        first, second = site_label(n_site), site_label(n_next)
    else:
        first = row("leaving_group_patterns", e_site.leaving_group)["label"] + f" on C{e_site.carbon + 1}"
        second = row("leaving_group_patterns", e_next.leaving_group)["label"] + f" on C{e_next.carbon + 1}"
    if shares[0] < _TOSS:
        return f"{first} and {second} compete: expect a mixture"
    return f"{first} before {second}, expected share {shares[0]:.0%}"
