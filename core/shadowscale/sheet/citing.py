"""Sentences of the methods paragraph and the works that they cite."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES, parse_key
from shadowscale.sheet.references import REFERENCES
from shadowscale.sheet.symbols import coefficient_sign, marked, plain


@dataclass
class Methods:
    """Paragraphs as they grow, and the works that they cite."""

    paragraphs: list[str] = field(default_factory=list)
    cited: list[str] = field(default_factory=list)

    def cite(self, *keys: str) -> str:
        """The works in brackets, as a sentence has them."""
        self.cited += [key for key in keys if key not in self.cited]
        return "(" + "; ".join(REFERENCES[key].cited for key in keys) + ")"

    def add(self, sentences: Iterable[str]) -> None:
        """A paragraph of sentences; empty ones are left out."""
        self.paragraphs.append(" ".join(sentence for sentence in sentences if sentence))


def listed(items: Sequence[str]) -> str:
    """Words as a sentence lists them."""
    if len(items) < 2:
        return "".join(items)
    return ", ".join(items[:-1]) + " and " + items[-1]


def symbol_of(text: str, law: str) -> str:
    """The symbol of a key, with its coefficient and band or source."""
    key = parse_key(text)
    words = marked(QUANTITIES[key.name].tex)
    if key.number is not None:
        words += f" {coefficient_sign(LAWS[law].coefficients[key.number - 1])}"
    return words + (f" [{plain(key.label)}]" if key.label is not None else "")
