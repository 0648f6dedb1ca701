"""The records that travel through the house, and their closed vocabularies.

A record is one thing a person looks at: a row that could not be read, a
building block, a reactive site, a product, a rate estimate, a flag, a
decision. Records are frozen; identity is text (id and SMILES), so they
compare, hash and pickle. The RDKit molecule rides along but takes no part in
comparison or printing, and is never changed once stored. Atom indices are
zero-based.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum

from rdkit.Chem import Mol

__all__ = [
    "BuildingBlock",
    "Choice",
    "Conditions",
    "Confidence",
    "Decision",
    "ElectrophileSite",
    "Flag",
    "Hazard",
    "HazardLevel",
    "Level",
    "NotAvailable",
    "NucleophileSite",
    "Product",
    "RateEstimate",
    "Remedy",
    "Role",
    "RowIssue",
    "Term",
    "Verdict",
]


class Role(StrEnum):
    """Which partner of the alkylation a block is used as."""

    NUCLEOPHILE = "nucleophile"
    ELECTROPHILE = "electrophile"


class Level(StrEnum):
    """How bad a reactivity flag is, worst first."""

    FAIL = "fail"
    WARN = "warn"
    NOTE = "note"


class HazardLevel(StrEnum):
    """How a hazard restricts the work, strictest first."""

    STOP = "stop"
    COMPLIANCE = "compliance"
    HIGH = "high"
    WARN = "warn"
    INFO = "info"


class Verdict(StrEnum):
    """What the toolkit thinks of a pair before anybody decides, best first."""

    GO = "go"
    WATCH = "watch"
    STUCK = "stuck"
    REFUSED = "refused"


class Choice(StrEnum):
    """What the chemist decides about a pair."""

    MAKE = "make"
    PARK = "park"
    SKIP = "skip"


class Confidence(StrEnum):
    """How sure the ranking of the products of one pair is."""

    CLEAR = "clear"
    AMBIGUOUS = "ambiguous"
    UNRESOLVED = "unresolved"


@dataclass(frozen=True, slots=True, kw_only=True)
class RowIssue:
    """One input row that cannot be used, or is used with a remark.

    `row` counts as a spreadsheet shows it: the header of a table is row 1.
    In an SDF file it is the number of the record.
    """

    row: int
    column: str
    received: str
    reason: str
    remedy: str

    def __str__(self) -> str:
        """One sentence: where, what, why, what to do."""
        shown = self.received if len(self.received) <= 60 else self.received[:57] + "..."
        return f"row {self.row}, {self.column}: received {shown!r}; {self.reason}. {self.remedy}."


@dataclass(frozen=True, slots=True, kw_only=True)
class BuildingBlock:
    """One reagent: the parent structure, what it was drawn with, and its row.

    Parameters
    ----------
    id : str
        The identifier exactly as it stood in the file.
    smiles : str
        Canonical isomeric SMILES of the parent, salts removed, neutral where
        that is possible.
    row : int
        Row of the input, see `RowIssue`.
    received : str
        The structure text before any clean-up.
    name : str
        Name from the file, or empty.
    counterions : tuple of str
        SMILES of every salt or solvent component that was split off, repeated
        as often as it occurred.
    columns : tuple of (str, str)
        Every column of the input row, unchanged.
    mol : rdkit.Chem.Mol
        The parent; not part of identity. Copy before changing.
    """

    id: str
    smiles: str
    row: int
    received: str
    mol: Mol = field(compare=False, repr=False)
    name: str = ""
    counterions: tuple[str, ...] = ()
    columns: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class NucleophileSite:
    """One atom of a block that can displace a leaving group.

    Parameters
    ----------
    block : BuildingBlock
    kind : str
        Key of `site_patterns.csv`.
    atom : int
        Reacting atom, index in `block.mol` (and in `form`).
    form : rdkit.Chem.Mol
        The tautomer in which the reacting atom carries the hydrogen it loses.
    key : str
        Canonical SMILES of the block with a dummy atom in place of that
        hydrogen: two sites with one key give the same products.
    log10_odds : float
        How strongly this site is preferred, log10 of relative odds among the
        sites of one block; only differences mean something.
    hydrogens : int
        Hydrogens on the reacting atom before the reaction.
    """

    block: BuildingBlock
    kind: str
    atom: int
    key: str
    log10_odds: float
    hydrogens: int
    form: Mol = field(compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class ElectrophileSite:
    """One carbon of a block and the group that leaves it.

    Parameters
    ----------
    block : BuildingBlock
    carbon : int
        Attacked carbon, index in `block.mol`.
    leaving_group : str
        Key of `leaving_group_patterns.csv`.
    leaving_atoms : tuple of int
        Atoms that depart, the one bonded to `carbon` first.
    key : str
        Canonical SMILES of the block with a dummy atom in place of the
        leaving group. A bromide and its mesylate share it.
    carbon_class : str
        Key of `carbon_patterns.csv`.
    good_leaving_group : bool
        False for groups that are recognised only to be flagged.
    log10_odds : float
        Preference among the sites of one block, log10.
    stripped : rdkit.Chem.Mol
        The molecule behind `key`; atom 0 is the dummy, atom 1 the carbon.
    stripped_atoms : tuple of int
        Index in `block.mol` of every atom of `stripped`.
    """

    block: BuildingBlock
    carbon: int
    leaving_group: str
    leaving_atoms: tuple[int, ...]
    key: str
    carbon_class: str
    good_leaving_group: bool
    log10_odds: float
    stripped: Mol = field(compare=False, repr=False)
    stripped_atoms: tuple[int, ...] = field(compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Product:
    """One product of a pair, with its place in the ranking.

    `probability` is the share of this product among the monoalkylation
    products the two blocks can give; `stereo` says what happened at the
    attacked carbon: "inverted", "undefined" or "none".
    """

    nucleophile: NucleophileSite
    electrophile: ElectrophileSite
    smiles: str
    rank: int
    probability: float
    confidence: Confidence
    reason: str
    stereo: str
    formula: str
    exact_mass: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Conditions:
    """What the whole plate has in common.

    Parameters
    ----------
    solvent : str
        Name as in `solvent_terms` of `rate_terms.csv`, for instance "DMF".
    temperature_celsius : float
    """

    solvent: str = "DMF"
    temperature_celsius: float = 60.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Term:
    """One addend of a rate estimate, in log10 units, with where it comes from."""

    block: str
    key: str
    label: str
    value: float
    low: float
    high: float
    source: str
    seen_at: str
    origin: str


@dataclass(frozen=True, slots=True, kw_only=True)
class RateEstimate:
    """Relative rate of one pair, as a sum of sourced terms.

    `log10_k_rel` is relative to `reference`; `low` and `high` bound it by the
    spread of the terms. `band` says the same in words.
    """

    log10_k_rel: float
    low: float
    high: float
    band: str
    reference: str
    terms: tuple[Term, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class NotAvailable:
    """An answer that cannot be given, and why. Never None, never NaN."""

    what: str
    reason: str
    missing: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Remedy:
    """What to do about a flag; `block_id` names a reagent of the store, if one helps."""

    sentence: str
    block_id: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Flag:
    """One reason for doubt about a block or a pair.

    `role` says on which block `atoms` (zero-based) lie.
    """

    id: str
    level: Level
    role: Role
    title: str
    sentence: str
    atoms: tuple[int, ...]
    source: str
    seen_at: str
    remedy: Remedy


@dataclass(frozen=True, slots=True, kw_only=True)
class Hazard:
    """One usual caution about a structure; absence of one is not safety."""

    id: str
    level: HazardLevel
    what: str
    action: str
    reason: str
    source: str
    seen_at: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Decision:
    """One line of the journal: who decided what about which pair, when and why."""

    serial: int
    nucleophile: str
    electrophile: str
    choice: Choice | None
    note: str
    who: str
    when: str
    tool_version: str
    tables: str
