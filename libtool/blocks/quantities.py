"""Numbers with units as people write them: "0,5 g", "250 uL", "0.5 M in THF", "> 95 %".

Units are pint's. A number without a unit, in the cell or in the column name,
is not guessed at; nor is a comma that could stand for a point or for thousands.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import pint

__all__ = ["DIMENSIONS", "Quantity", "Unclear", "decimal_mark", "header_unit", "parse_quantity"]

DIMENSIONS = {
    "mass": "mg",
    "amount": "mmol",
    "volume": "mL",
    "density": "g/mL",
    "temperature": "degC",
    "molarity": "mol/L",
    "fraction": "percent",
    "molecular_weight": "g/mol",
}
"""Unit in which a quantity of each kind is kept."""

_NUMBER = r"[0-9][0-9.,'\u2019\u00a0\u202f ]*(?:[eE][+-]?[0-9]+)?"
_CELL = re.compile(
    rf"^\s*(?P<sign>[<>~≥≤≈]?\s*[-+\u2212]?)\s*(?P<number>{_NUMBER})\s*(?P<unit>[^\s(,;]*[^\s(,;.]?)(?P<rest>.*)$"
)
_SOLVENT = re.compile(
    r"^[\s,;(]*(?:solution|lösung|sol\.?|soln\.?)?[\s,;(]*(?:in|dans|en)\s+(?P<solvent>[^)]+?)\)?\s*$", re.I
)
# Spellings that pint does not know.
_SPELLINGS = {
    "wt%": "percent", "wt.%": "percent", "w%": "percent", "%w/w": "percent", "%": "percent", "percent": "percent",
    "prozent": "percent", "pct": "percent", "g/cm3": "g/mL", "g/cm³": "g/mL", "g/cc": "g/mL", "c": "degC", "°c": "degC",
    "celsius": "degC", "n": "mol/L", "m": "mol/L", "mm": "mmol/L", "µm": "umol/L", "um": "umol/L", "da": "g/mol",
    "l": "L", "ml": "mL", "ul": "uL", "µl": "uL", "microl": "uL", "gr": "g", "gram": "g", "grams": "g", "mgs": "mg",
}  # fmt: skip
_UNIT = re.compile(r"^[a-zµμ°]{1,12}(?:[/·][a-zµμ°]{1,12})?$", re.I)
_POINT_EVIDENCE = re.compile(r"\d\.\d{1,2}$|\d\.\d{4,}$|^0\.\d|\d,\d{3}\.\d|\d\.\d+[eE]")
_COMMA_EVIDENCE = re.compile(r"\d,\d{1,2}$|\d,\d{4,}$|^0,\d|\d\.\d{3},\d|\d,\d+[eE]")
_COMMA_OR_THOUSANDS = re.compile(r"^\d{1,3}(?:[,.]\d{3})$")


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """A number in the unit of its kind; `solvent` as written, for a solution."""

    value: float
    unit: str
    kind: str
    solvent: str = ""


@dataclass(frozen=True, slots=True)
class Unclear:
    """Why a cell is no quantity, and what to do."""

    reason: str
    remedy: str


def decimal_mark(cells: Iterable[str]) -> str:
    """Sign between whole and fraction in a column: ".", "," or "" where nothing tells."""
    numbers = [m["number"].strip() for cell in cells if (m := _CELL.match(cell))]
    point = any(_POINT_EVIDENCE.search(number) for number in numbers)
    comma = any(_COMMA_EVIDENCE.search(number) for number in numbers)
    return "" if point == comma else "." if point else ","


def header_unit(name: str) -> str:
    """Unit that a column name carries, in pint's spelling, or empty: "Amount (mg)", "amount_mg", "bp °C"."""
    bracketed = re.search(r"[(\[]([^)\]]+)[)\]]", name)
    candidates = [bracketed[1]] if bracketed else []
    candidates += [re.split(r"[\s_]+", name.strip())[-1]] if re.search(r"[\s_]", name.strip()) else []
    candidates += [name[name.index("%") :]] if "%" in name else []
    for text in candidates:
        if unit := _unit(text.strip(" ,in")):
            return unit
    return ""


def parse_quantity(cell: str, kinds: tuple[str, ...], *, unit: str = "", mark: str = "") -> Quantity | Unclear:
    """Quantity in a cell.

    Parameters
    ----------
    cell : str
    kinds : tuple of str
        Kinds that make sense here, keys of `DIMENSIONS`.
    unit : str
        Unit of the column, for cells that carry none.
    mark : str
        Decimal mark of the column, from `decimal_mark`.

    Returns
    -------
    Quantity or Unclear
        In the unit of its kind. A bound such as "> 95 %" gives the number.
    """
    match = _CELL.match(cell)
    if not match:
        return Unclear("this is not a number with a unit", "Write for instance 250 mg")
    number = _number(match["number"], match["sign"], mark)
    if isinstance(number, Unclear):
        return number
    written, rest = match["unit"], match["rest"]
    # "80 wt % in toluene" and "95 % w/w" carry a blank inside the unit.
    if written.lower() in {"wt", "w"} and rest.strip().startswith("%"):
        written, rest = "%", rest.strip()[1:]
    solvent = _SOLVENT.match(f" {written}{rest}" if written.lower() in {"in", "dans"} else rest)
    own = "" if written.lower() in {"in", "dans"} else _unit(written)
    used = own or ("" if written and not solvent else unit)
    if not used:
        shown = f"the unit {written!r} is not known" if written else "the number has no unit"
        return Unclear(
            shown, f"Write it with one of {', '.join(DIMENSIONS[k] for k in kinds)}, or into the column name"
        )
    for kind in kinds:
        value = _converted(number, used, DIMENSIONS[kind])
        if value is not None:
            return Quantity(
                value=value, unit=DIMENSIONS[kind], kind=kind, solvent=solvent["solvent"] if solvent else ""
            )
    return Unclear(
        f"{used} is not a unit of {' or '.join(k.replace('_', ' ') for k in kinds)}",
        f"Write it with one of {', '.join(DIMENSIONS[k] for k in kinds)}",
    )


def _number(text: str, sign: str, mark: str) -> float | Unclear:
    plain = re.sub(r"['\u2019\u00a0\u202f ]", "", text)
    both = "." in plain and "," in plain
    if both:
        mark = "," if plain.rfind(",") > plain.rfind(".") else "."
    elif _COMMA_OR_THOUSANDS.match(plain) and not mark and "," in plain:
        return Unclear(
            f"{text.strip()} can be read as {plain.replace(',', '.')} or as {plain.replace(',', '')}",
            "Write it without a comma",
        )
    elif not mark:
        mark = "," if "," in plain else "."
    other = "." if mark == "," else ","
    try:
        value = float(plain.replace(other, "").replace(mark, "."))
    except ValueError:
        return Unclear(f"{text.strip()} is not a number", "Write it with one decimal mark")
    return -value if sign.strip().endswith(("-", "\u2212")) else value


@cache
def _registry() -> pint.UnitRegistry[float]:
    # Imported late: half a second that a list without amounts need not pay.
    import pint

    return pint.UnitRegistry()


@cache
def _unit(text: str) -> str:
    """Unit in pint's spelling, or empty."""
    import pint

    spelling = text.strip().strip(".").lower()
    # M is molar and m metre; no reagent is sold by the metre.
    known = _SPELLINGS.get(spelling)
    if known:
        return known
    # pint computes what it is given, and a cell is anybody's text: only what
    # has the form of a unit reaches it.
    if not _UNIT.match(text.strip()):
        return ""
    try:
        return f"{_registry().parse_units(text.strip().replace('·', '*')):~C}"
    except (pint.UndefinedUnitError, pint.OffsetUnitCalculusError):
        return ""


@cache
def _scale(unit: str, wanted: str) -> tuple[float, float] | None:
    """Factor and offset from one unit to another, None where they do not measure the same.

    Every unit met here is linear in the wanted one, so two points fix it; a
    long list would spend most of its time in pint otherwise.
    """
    import pint

    registry = _registry()
    try:
        zero, one = (float(registry.Quantity(point, unit).to(wanted).magnitude) for point in (0.0, 1.0))
    except (pint.DimensionalityError, pint.UndefinedUnitError):
        return None
    return one - zero, zero


def _converted(number: float, unit: str, wanted: str) -> float | None:
    scale = _scale(unit, wanted)
    return None if scale is None else number * scale[0] + scale[1]
