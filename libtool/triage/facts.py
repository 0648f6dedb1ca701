"""Findings that a pattern on one molecule cannot express.

Each row of `flags.csv` is either a SMARTS pattern, anchored at the reacting
atom, or the name of one of the functions here. A function returns the atoms
concerned and the words that fill the sentence, or None where the flag does
not apply.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

from rdkit import Chem

from libtool.blocks.clean import counterion_name
from libtool.reaction.electrophiles import good_leaving_bonds
from libtool.reaction.nucleophiles import nucleophile_sites, site_label
from libtool.records import BuildingBlock, ElectrophileSite, NucleophileSite, RateEstimate, Role
from libtool.reference.tables import number, row

__all__ = ["ELECTROPHILE_FACTS", "NUCLEOPHILE_FACTS", "PAIR_FACTS", "Finding"]

_SUPERSCRIPT = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
# Two sites whose odds differ less than this give a mixture worth a word:
# 10:1, what a chemist sees at once in a crude NMR.
_COMPETING_ODDS = 1.0
# Isomers of one ring are hard to separate: named down to about 3 %.
_MINOR_ISOMER_ODDS = 1.5
# Classes at and above aniline react with an electrophile of the same molecule.
_SELF_REACTIVE_KINDS_FLOOR = "aniline"
_STRONGEST_GROUPS = frozenset({"OTf", "OSO2F"})


@dataclass(frozen=True, slots=True)
class Finding:
    """Atoms concerned, on the block of `role`, and words for the sentence."""

    role: Role
    atoms: tuple[int, ...]
    words: Mapping[str, str] = field(default_factory=dict)


ElectrophileFact = Callable[[BuildingBlock, ElectrophileSite | None], Finding | None]
NucleophileFact = Callable[[BuildingBlock, Sequence[NucleophileSite]], Finding | None]
PairFact = Callable[[NucleophileSite, ElectrophileSite, RateEstimate | None], Finding | None]


def _on_electrophile(*atoms: int, **words: str) -> Finding:
    return Finding(Role.ELECTROPHILE, atoms, words)


def _on_nucleophile(*atoms: int, **words: str) -> Finding:
    return Finding(Role.NUCLEOPHILE, atoms, words)


# --- electrophile ---------------------------------------------------------


def beta_branches(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Branches on the beta carbon: heavy atoms besides the attacked carbon and one chain."""
    if site is None:
        return None
    carbon = block.mol.GetAtomWithIdx(site.carbon)
    for beta in carbon.GetNeighbors():
        if beta.GetIdx() in site.leaving_atoms or beta.GetAtomicNum() != 6:
            continue
        outer = [a.GetIdx() for a in beta.GetNeighbors() if a.GetIdx() != site.carbon and a.GetAtomicNum() > 1]
        if len(outer) >= 2:
            return _on_electrophile(site.carbon, beta.GetIdx(), *outer, branches=str(len(outer) - 1))
    return None


def bridgehead(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Leaving group on a bridgehead atom."""
    if site is None or site.carbon_class != "bridgehead":
        return None
    return _on_electrophile(site.carbon, site.leaving_atoms[0])


def plain_tertiary(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Tertiary carbon without a flag of its own: no bridgehead, trityl type or acceptor beside it."""
    if site is None or site.carbon_class != "tertiary":
        return None
    return _on_electrophile(site.carbon, site.leaving_atoms[0])


def not_a_triflate(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Any leaving group but triflate and fluorosulfate, which overcome a slow carbon."""
    if site is None or site.leaving_group in _STRONGEST_GROUPS:
        return None
    return _on_electrophile(site.carbon, site.leaving_atoms[0])


def a_triflate(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Triflate or fluorosulfate."""
    if site is None or site.leaving_group not in _STRONGEST_GROUPS:
        return None
    return _on_electrophile(site.carbon, site.leaving_atoms[0])


def poor_leaving_group(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Group recognised only to be flagged, with how much slower than bromide it is."""
    if site is None or site.good_leaving_group:
        return None
    term = row("rate_terms", f"leaving_group_{site.leaving_group.lower()}")
    group = row("leaving_group_patterns", site.leaving_group)
    acid, bromide = row("pka", group["conjugate_acid"]), row("pka", "hydrogen_bromide_water")
    return _on_electrophile(
        site.carbon,
        site.leaving_atoms[0],
        leaving=group["label"][0].upper() + group["label"][1:],
        power=f"{-number(term, 'log10'):.0f}".translate(_SUPERSCRIPT),
        about="at least" if "upper bound" in term["note"] else "about",
        pka=f"pKa {acid['value']} ({acid['compound']}) against {bromide['value']} ({bromide['compound']})",
    )


def unactivated_chloride(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Chloride on a carbon whose neighbours do not speed it up."""
    if site is None or site.leaving_group != "Cl" or site.log10_odds > 0.5:
        return None
    if row("carbon_patterns", site.carbon_class)["kind"] == "blocked":
        return None
    return _on_electrophile(site.carbon, site.leaving_atoms[0])


def several_leaving_groups(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """More than one good leaving group on sp3 carbon, equivalent ones included."""
    bonds = good_leaving_bonds(block.mol)
    if len(bonds) < 2:
        return None
    return _on_electrophile(*sorted({carbon for carbon, _ in bonds}), count=str(len(bonds)))


def defined_stereocentre(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Attacked carbon drawn with a defined configuration."""
    if site is None:
        return None
    defined = block.mol.GetAtomWithIdx(site.carbon).GetChiralTag() != Chem.ChiralType.CHI_UNSPECIFIED
    return _on_electrophile(site.carbon) if defined else None


_ACIDIC_NEIGHBOUR = Chem.MolFromSmarts("[CX4;!H0]-[$([CX3]=[OX1]),$(C#N),c]")


def racemisable(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Defined stereocentre next to a carbonyl, nitrile or aryl group."""
    found = defined_stereocentre(block, site)
    if found is None or site is None:
        return None
    matches = [m for m in block.mol.GetSubstructMatches(_ACIDIC_NEIGHBOUR, uniquify=False) if m[0] == site.carbon]
    return _on_electrophile(*matches[0]) if matches else None


def self_reactive(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Electrophile with a nucleophilic site of its own."""
    if site is None or not site.good_leaving_group:
        return None
    floor = number(row("site_patterns", _SELF_REACTIVE_KINDS_FLOOR), "log10_odds")
    own = [s for s in nucleophile_sites(block) if s.log10_odds >= floor]
    return _on_electrophile(own[0].atom, site.carbon, site=site_label(own[0])) if own else None


_ACYLATING = Chem.MolFromSmarts("[$([CX3](=O)[Cl,Br,I]),$(S(=O)(=O)[Cl,Br]),$(N=C=[O,S])]")


def acylating_group(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Acyl or sulfonyl halide or isocyanate, which reacts before any alkyl halide."""
    matches = block.mol.GetSubstructMatches(_ACYLATING)
    return _on_electrophile(*(m[0] for m in matches)) if matches else None


_STRAINED_RING = Chem.MolFromSmarts("[CX4;r3]1[CX4;r3][O,S,N;r3]1")


def strained_ring(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Epoxide, aziridine or thiirane and no leaving group."""
    return None if site else _ring_of_three(block)


def strained_ring_besides(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Epoxide, aziridine or thiirane beside a leaving group."""
    return _ring_of_three(block) if site else None


def _ring_of_three(block: BuildingBlock) -> Finding | None:
    match = block.mol.GetSubstructMatch(_STRAINED_RING)
    return _on_electrophile(*match) if match else None


def no_electrophilic_site(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """Nothing that leaves, and no ring that opens."""
    return None if site or _ring_of_three(block) else _on_electrophile()


# --- nucleophile ----------------------------------------------------------


def acid_salt(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> Finding | None:
    """Counter-ions that carry an acidic proton for the base."""
    words = _salt_words(block)
    return _on_nucleophile(**words) if words else None


def electrophile_salt(block: BuildingBlock, site: ElectrophileSite | None) -> Finding | None:
    """The same for an electrophile, for instance a basic one sold as hydrochloride."""
    words = _salt_words(block)
    return _on_electrophile(**words) if words else None


def _salt_words(block: BuildingBlock) -> dict[str, str]:
    acids = [c for c in block.counterions if _protons(c)]
    # The counter-ion of a permanent cation brought no proton along.
    equivalents = sum(map(_protons, acids)) - max(0, Chem.GetFormalCharge(block.mol))
    if equivalents <= 0:
        return {}
    names = sorted({counterion_name(a) for a in acids})
    return {"salt": " and ".join(names), "equivalents": str(equivalents)}


_ACID_PROTON = Chem.MolFromSmarts(
    "[$([F,Cl,Br,I;H1]),$([F-,Cl-,Br-,I-]),$([OX2;H1]-[C,S,P,N,Cl]=O),$([OX1-]-[C,S,P,N,Cl]=O)]"
)


def _protons(smiles: str) -> int:
    """Acid equivalents of one counter-ion; anions came with the protonated amine."""
    return len(Chem.MolFromSmiles(smiles).GetSubstructMatches(_ACID_PROTON))


def no_nucleophilic_site(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> Finding | None:
    """Nothing that attacks."""
    return None if sites else _on_nucleophile()


def several_nucleophilic_sites(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> Finding | None:
    """A site of another class close behind the first."""
    rivals = [s for s in sites[1:] if s.kind != sites[0].kind or s.atom != sites[0].atom]
    rivals = [s for s in rivals if sites[0].log10_odds - s.log10_odds < _COMPETING_ODDS and not _same_ring(sites[0], s)]
    if not rivals:
        return None
    return _on_nucleophile(
        sites[0].atom,
        rivals[0].atom,
        first=site_label(sites[0]),
        second=" and ".join(site_label(r) for r in rivals),
    )


def _same_ring(one: NucleophileSite, other: NucleophileSite) -> bool:
    """Both are positions of one azole or azinone ring, which has flags of its own."""
    rings = one.block.mol.GetRingInfo().AtomRings()
    ring_atoms = [_ring_partner(one), _ring_partner(other)]
    return any(all(a in ring for a in ring_atoms) for ring in rings)


def _ring_partner(site: NucleophileSite) -> int:
    """Ring atom of a site; for an exocyclic oxygen or sulfur the carbon that bears it."""
    atom = site.form.GetAtomWithIdx(site.atom)
    if atom.IsInRing():
        return site.atom
    return next((a.GetIdx() for a in atom.GetNeighbors() if a.GetIsAromatic()), site.atom)


def regioisomers(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> Finding | None:
    """Two nitrogens of one azole with similar odds."""
    pairs = [s for s in sites[1:] if _same_ring(sites[0], s) and s.form.GetAtomWithIdx(s.atom).GetIsAromatic()]
    close = [s for s in pairs if sites[0].log10_odds - s.log10_odds < _MINOR_ISOMER_ODDS]
    if not close or not sites[0].form.GetAtomWithIdx(sites[0].atom).GetIsAromatic():
        return None
    return _on_nucleophile(
        sites[0].atom,
        *(s.atom for s in close),
        first=site_label(sites[0]),
        second=" and ".join(map(site_label, close)),
    )


def nitrogen_or_oxygen(block: BuildingBlock, sites: Sequence[NucleophileSite]) -> Finding | None:
    """Ring nitrogen and exocyclic oxygen of one azinone, one of them in front."""
    for other in sites[1:]:
        kinds = {sites[0].kind, other.kind}
        if kinds == {"azinone_nh", "hydroxyheteroaryl"} and _same_ring(sites[0], other):
            return _on_nucleophile(sites[0].atom, other.atom)
    return None


# --- pair -----------------------------------------------------------------

_HINDERED_CLASSES = frozenset({"neopentyl_type", "secondary", "cyclohexyl", "cyclobutyl", "fluoroalkyl_methyl"})
_AMINES = frozenset({"primary_amine", "ammonia", "hydrazine"})


def over_alkylation(n: NucleophileSite, e: ElectrophileSite, rate: RateEstimate | None) -> Finding | None:
    """Amine with two hydrogens and an electrophile that does not mind the bulk of the product."""
    if n.kind not in _AMINES or n.hydrogens < 2 or e.carbon_class in _HINDERED_CLASSES or rate is None:
        return None
    label = site_label(n)
    return _on_nucleophile(n.atom, nucleophile=label[0].upper() + label[1:])


def double_alkylation(n: NucleophileSite, e: ElectrophileSite, rate: RateEstimate | None) -> Finding | None:
    """Any other nucleophile that can react twice: two hydrogens, or a second site of the same kind."""
    if rate is None or ((n.kind in _AMINES or n.hydrogens < 2) and not _has_equivalent_site(n)):
        return None
    label = site_label(n)
    return _on_nucleophile(n.atom, nucleophile=label[0].upper() + label[1:])


def _has_equivalent_site(site: NucleophileSite) -> bool:
    """Another atom that the symmetry of the block makes equal to the reacting one, as in piperazine."""
    if site.form.GetAtomWithIdx(site.atom).GetIsAromatic():
        # The two nitrogens of an azole share one hydrogen.
        return False
    ranks = list(Chem.CanonicalRankAtoms(site.block.mol, breakTies=False))
    return ranks.count(ranks[site.atom]) > 1


# Substrate classes of the published SN2/E2 ratios, by key of sn2_e2_ratios.
_ELIMINATION_RECORD = {
    "secondary": "2_bromopropane_ethoxide_ethanol",
    "isobutyl_type": "isobutyl_bromide_methoxide_methanol",
}
_BASIC_SPECIES = frozenset({"hard_anion"})
_BASIC_KINDS = frozenset({"amide", "lactam", "carbamate", "indole_nh", "alcohol"})


def elimination(n: NucleophileSite, e: ElectrophileSite, rate: RateEstimate | None) -> Finding | None:
    """Strongly basic nucleophile on a branched carbon with beta hydrogens."""
    basic = n.kind in _BASIC_KINDS or row("site_patterns", n.kind)["species"] in _BASIC_SPECIES
    class_row = row("carbon_patterns", e.carbon_class)
    branched = e.carbon_class in _ELIMINATION_RECORD or class_row["smarts"].startswith("[#0]-[CX4;H1")
    hydrogens = _beta_hydrogens(e)
    if not basic or not branched or not hydrogens:
        return None
    record = row("sn2_e2_ratios", _ELIMINATION_RECORD.get(e.carbon_class, _ELIMINATION_RECORD["secondary"]))
    return Finding(
        Role.ELECTROPHILE,
        (e.carbon, *sorted(hydrogens)),
        {
            "nucleophile": site_label(n),
            "carbon": class_row["label"],
            "hydrogens": str(sum(hydrogens.values())),
            "record": f"{record['substrate_name']} with {record['nucleophile']} gives {record['percent_e2']} % alkene",
        },
    )


def _beta_hydrogens(site: ElectrophileSite) -> dict[int, int]:
    """Hydrogens on each sp3 beta carbon."""
    carbon = site.block.mol.GetAtomWithIdx(site.carbon)
    return {
        a.GetIdx(): a.GetTotalNumHs()
        for a in carbon.GetNeighbors()
        if a.GetAtomicNum() == 6
        and a.GetIdx() not in site.leaving_atoms
        and a.GetHybridization() == Chem.HybridizationType.SP3
        and a.GetTotalNumHs()
    }


_TOO_SLOW = -3.0
"""Three log units below the reference: two hours become eighty days."""


def predicted_too_slow(n: NucleophileSite, e: ElectrophileSite, rate: RateEstimate | None) -> Finding | None:
    """Predicted rate below anything a plate waits for, where a number can be given."""
    if rate is None or rate.log10_k_rel > _TOO_SLOW:
        return None
    # One significant figure: the estimate is no better.
    times = float(f"{10**-rate.log10_k_rel:.0e}")
    return _on_electrophile(e.carbon, times=f"{times:,.0f}", reference=rate.reference)


def _named(*functions: Callable[..., Finding | None]) -> dict[str, Callable[..., Finding | None]]:
    return {function.__name__: function for function in functions}


ELECTROPHILE_FACTS: Mapping[str, ElectrophileFact] = _named(
    beta_branches, bridgehead, plain_tertiary, not_a_triflate, a_triflate, poor_leaving_group, unactivated_chloride,
    several_leaving_groups, acylating_group, electrophile_salt, defined_stereocentre, racemisable, self_reactive,
    strained_ring, strained_ring_besides, no_electrophilic_site,
)  # fmt: skip
NUCLEOPHILE_FACTS: Mapping[str, NucleophileFact] = _named(
    acid_salt, no_nucleophilic_site, several_nucleophilic_sites, regioisomers, nitrogen_or_oxygen
)
PAIR_FACTS: Mapping[str, PairFact] = _named(over_alkylation, double_alkylation, elimination, predicted_too_slow)
