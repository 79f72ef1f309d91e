"""A plain table: text as typed, figures to the right, and on a phone one block a row where it is wide."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import streamlit as st

from planner.ui.text import escaped

TABLE_STYLE: Final = """
.p-table{width:100%;border-collapse:collapse;font-size:.9375rem;line-height:1.4;margin:.25rem 0 .5rem}
.p-table caption{text-align:left;font-weight:600;padding-bottom:.35rem}
.p-table th{font-weight:500;color:var(--muted);font-size:.8125rem;text-align:left;vertical-align:bottom}
.p-table th,.p-table td{padding:.35rem .75rem .35rem 0;border-bottom:1px solid var(--rule)}
.p-table td{vertical-align:top}
.p-table .p-right{text-align:right;white-space:nowrap;font-variant-numeric:tabular-nums}
.p-table th.p-right{white-space:normal}
.p-table .p-right+td:not(.p-right),.p-table .p-right+th:not(.p-right){padding-left:1.25rem}
.p-table th:last-child,.p-table td:last-child{padding-right:0}
.p-table tbody th{color:var(--text);font-size:.9375rem;font-weight:400;vertical-align:top}
@media (max-width:640px){
 .p-table.p-stack thead{display:none}
 .p-table.p-stack tr{display:block;padding:.5rem 0;border-bottom:1px solid var(--rule)}
 .p-table.p-stack th,.p-table.p-stack td{display:flex;justify-content:space-between;gap:1rem;border:0;
  padding:.1rem 0!important;text-align:right;white-space:normal}
 .p-table.p-stack tbody th{font-weight:600;text-align:left}
 .p-table.p-stack td::before{content:attr(data-label);color:var(--muted);text-align:left;flex:none}
 .p-table.p-stack td:empty{display:none}
}
"""


def table(
    head: Sequence[str],
    rows: Sequence[Sequence[str]],
    *,
    right: Sequence[int] = (),
    caption: str = "",
    stack: bool = False,
) -> None:
    """Draw a table whose first column names the row.

    Parameters: `right` are the columns of figures; `stack` breaks each row into lines on a phone.
    """
    st.html(table_html(head, rows, right=right, caption=caption, stack=stack))


def note(text: str) -> None:
    """Say something quietly under a table or a chart."""
    st.html(f'<div class="p-small">{escaped(text)}</div>')


def table_html(
    head: Sequence[str],
    rows: Sequence[Sequence[str]],
    *,
    right: Sequence[int] = (),
    caption: str = "",
    stack: bool = False,
) -> str:
    """Return the table as HTML, every text escaped."""
    kinds = [' class="p-right"' if i in right else "" for i in range(len(head))]
    top = "".join(
        f'<th scope="col"{kind}>{escaped(text)}</th>' for kind, text in zip(kinds, head, strict=True)
    )
    body = "".join(_row(head, row, kinds) for row in rows)
    title = f"<caption>{escaped(caption)}</caption>" if caption else ""
    return (
        f'<table class="p-table{" p-stack" if stack else ""}">{title}'
        f"<thead><tr>{top}</tr></thead><tbody>{body}</tbody></table>"
    )


def _row(head: Sequence[str], row: Sequence[str], kinds: Sequence[str]) -> str:
    first = f'<th scope="row"{kinds[0]}>{escaped(row[0])}</th>'
    rest = "".join(
        f'<td{kind} data-label="{escaped(label)}">{escaped(text)}</td>'
        for label, text, kind in zip(head[1:], row[1:], kinds[1:], strict=True)
    )
    return f"<tr>{first}{rest}</tr>"
