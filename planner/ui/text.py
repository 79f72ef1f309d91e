"""Stored and typed text on its way to the screen: always shown as the characters that were typed."""

from __future__ import annotations

import html
import re
from typing import Final

_MARKDOWN: Final = re.compile(r"([\\`*_{}\[\]()<>#+\-.!|~$:&@/])")


def literal(text: str) -> str:
    """Text for a Markdown element, with everything escaped that Markdown would act on."""
    return _MARKDOWN.sub(r"\\\1", " ".join(text.split()))


def escaped(text: str) -> str:
    """Text for an HTML element or attribute."""
    return html.escape(text, quote=True)
