"""Stored and typed text on its way to the screen: always shown as the characters that were typed."""

from __future__ import annotations

import html
import re
from typing import Final

_MARKDOWN: Final = re.compile(r"([\\`*_{}\[\]()<>#+\-.!|~$:&@/])")
# Addresses become links although every sign of them is escaped; a sign without width keeps them apart.
_ADDRESS: Final = re.compile(r"(?<=:)(?=//)|(?<=www)(?=\.)|(?<=@)", re.IGNORECASE)
_WORD_JOINER: Final = "\u2060"


def literal(text: str) -> str:
    """Text for a Markdown element, with everything escaped that Markdown would act on."""
    return _MARKDOWN.sub(r"\\\1", _ADDRESS.sub(_WORD_JOINER, " ".join(text.split())))


def escaped(text: str) -> str:
    """Text for an HTML element or attribute."""
    return html.escape(text, quote=True)
