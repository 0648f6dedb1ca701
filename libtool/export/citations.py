"""Numbered citations of one document."""

from __future__ import annotations

from html import escape

from libtool.reference.tables import cite

__all__ = ["Citations"]


class Citations:
    """Gives each source a number when it is first named, and lists them at the end."""

    def __init__(self) -> None:
        self._numbers: dict[str, int] = {}

    def link(self, keys: str) -> str:
        """Links to the list, as HTML, for one source key or several joined by ";"."""
        numbers = [self._numbers.setdefault(key, len(self._numbers) + 1) for key in keys.split(";")]
        inside = ", ".join(f'<a href="#source-{number}">{number}</a>' for number in dict.fromkeys(numbers))
        return f"[{inside}]"

    def full(self, keys: str) -> str:
        """Citations in full with their links, as HTML."""
        return f'<span class="soft">{escape(cite(keys))} {self.link(keys)}</span>'

    def listed(self) -> str:
        """Every source named so far, as an HTML list."""
        items = "".join(f'<li id="source-{number}">{escape(cite(key))}</li>' for key, number in self._numbers.items())
        return f'<ol class="sources">{items}</ol>'
