"""The style sheet that every page carries. Colours come from the theme's table by name only."""

from __future__ import annotations

from typing import Final

from planner.charts.strip import STRIP_STYLE
from planner.charts.theme import style_variables
from planner.ui.tables import TABLE_STYLE

_PAGE: Final = """
.stMainBlockContainer{max-width:72rem;padding-left:1.25rem;padding-right:1.25rem}
.stApp{font-variant-numeric:tabular-nums lining-nums}
.stApp [data-testid="stHtml"]{overflow-wrap:break-word;overflow-x:auto}
.p-row,.p-answer,.p-line,.p-kept{overflow-wrap:anywhere}
button[data-testid^="stBaseButton-primary"]:enabled,
button[data-testid^="stBaseButton-primary"]:enabled *,
.stApp [data-tag],.stApp [data-tag] *{color:var(--on-accent)}
button[data-testid="stBaseButton-tertiary"],
[data-testid="stPopover"] button[kind="tertiary"]{color:var(--accent)}
[class*="st-key-p-card-"]{padding:.6rem .9rem .5rem;background:var(--surface);margin-bottom:-.4rem}
[class*="st-key-p-acts-"]{gap:0}
[class*="st-key-p-acts-"] button{min-height:1.75rem;padding:0}
.st-key-p-acts-last{gap:1.25rem}
.st-key-p-card-correct,.st-key-p-card-ill{margin-bottom:0;padding-bottom:.9rem}
a[aria-current="page"][aria-current="page"]{background:color-mix(in srgb,var(--accent) 14%,transparent)}
[class*="st-key-p-menu-"]{display:none}
[data-testid="stAlertContainer"]{border:1px solid var(--rule);border-left:4px solid currentColor}
.stApp [data-testid="stPageLink"] a,[data-testid="stPopoverBody"] [data-testid="stPageLink"] a{padding-left:0;
 background:transparent}
[data-testid="stPageLink"] a *{color:var(--accent)}
.p-over{font-size:.8125rem;color:var(--muted);letter-spacing:.02em;line-height:1.4}
.p-answer{font-size:1.375rem;font-weight:600;line-height:1.3;margin:0;padding:0}
.p-line{color:var(--muted);font-size:.9375rem;line-height:1.45}
.p-foot{color:var(--muted);font-size:.8125rem;line-height:1.5;border-top:1px solid var(--rule);
 padding-top:.75rem;margin-top:1.25rem}
.p-foot summary{padding:.35rem 0}
.p-signs{margin:.25rem 0 .5rem;padding-left:1.1rem}
.p-out{font-weight:600;white-space:nowrap}
.p-out.in-range{color:var(--in-range);font-weight:500}
.p-out.repeat{color:var(--repeat)}
.p-out.refer{color:var(--refer)}
.p-out.not-measured{color:var(--muted);font-weight:500}
.p-out.urgent{color:var(--urgent);background:var(--urgent-ground);font-weight:700;padding:.1rem .5rem;
 border-radius:.25rem}
.p-row{display:grid;grid-template-columns:9rem 9rem minmax(0,1fr) 14rem;column-gap:1rem;align-items:start}
.stApp .p-name{font-size:1rem;font-weight:600;line-height:1.35;margin:0;padding:0}
.p-value{font-size:1.375rem;font-weight:600;line-height:1.2}
.p-small{font-size:.8125rem;color:var(--muted);line-height:1.4}
.p-why{font-size:.9375rem;line-height:1.4}
.p-do{font-weight:600}
.st-key-p-type,.st-key-p-import{max-width:48rem}
.p-kept{border-left:3px solid var(--accent);padding:.15rem .75rem;font-size:.9375rem}
@media (max-width:1023.98px){
 [class*="st-key-p-card-"]:has(.p-row) [data-testid="stHorizontalBlock"]{flex-wrap:wrap}
 [class*="st-key-p-card-"]:has(.p-row) [data-testid="stColumn"]{min-width:100%}
 [class*="st-key-p-acts-"]{flex-direction:row;gap:1.25rem;margin-top:-.75rem}
 .st-key-p-acts-last{margin-top:0}
 .p-row{grid-template-columns:minmax(0,1fr) auto;row-gap:.35rem}
 .p-row .p-wide{grid-column:1/-1}
}
@media (max-width:767.98px){
 [data-testid="stHeader"],[data-testid="stSidebar"]{display:none}
 .stMainBlockContainer{padding-top:.5rem}
 .st-key-p-head>:has(.p-over){display:none}
 [class*="st-key-p-menu-"]{display:flex;margin-right:auto}
}
@media (max-width:640px),(pointer:coarse){
 .st-key-you{min-width:0;max-width:6.5rem}
 .st-key-you p{overflow:hidden;text-overflow:ellipsis;white-space:nowrap}
 .stApp button kbd{display:none}
 [data-testid="stCheckbox"] label{min-height:2.5rem}
 [data-testid="stPopoverBody"] [data-testid="stPageLink"] a{min-height:2.75rem}
 [data-testid="stNumberInput"] button{min-width:2.5rem}
 .p-foot summary{padding:.75rem 0}
 [data-testid="stButtonGroup"] button{min-height:2.5rem}
 [class*="st-key-p-acts-"] button{min-height:2.75rem}
 .stMainBlockContainer{padding-left:.875rem;padding-right:.875rem}
 .p-answer{font-size:1.25rem}
}
"""


def style_sheet() -> str:
    """The whole style as one <style> element."""
    return f"<style>:root,.stApp{{{style_variables()}}}{_PAGE}{TABLE_STYLE}{STRIP_STYLE}</style>"
