"""Style and script of the report's page."""

from __future__ import annotations

import base64
import hashlib

STYLE = """
:root { --ink: #22262b; --quiet: #5b6268; --line: #d9dde0; --pale: #f3f5f6; --mark: #14213d; }
* { box-sizing: border-box; }
body { margin: 0 auto; max-width: 72rem; padding: 1rem 1.25rem 4rem; color: var(--ink);
  font: 15px/1.5 "Segoe UI", "Noto Sans", "DejaVu Sans", Helvetica, Arial, sans-serif;
  overflow-wrap: break-word; background: #fff; }
h1 { font-size: 1.7rem; margin: .5rem 0 .25rem; line-height: 1.2; }
h2 { font-size: 1.25rem; margin: 2.5rem 0 .5rem; padding-top: .5rem;
  border-top: 2px solid var(--mark); }
h3 { font-size: 1.05rem; margin: 1.5rem 0 .25rem; }
h4 { font-size: .95rem; margin: 1rem 0 .2rem; color: var(--quiet); }
p, ul { margin: .35rem 0; } ul { padding-left: 1.2rem; } li { margin: .15rem 0; }
a { color: #1b5c8c; }
nav ul { list-style: none; padding: 0; display: flex; flex-wrap: wrap; gap: .25rem 1rem; }
.quiet { color: var(--quiet); }
.verdict { font-size: 1.05rem; padding: .5rem .75rem; border-left: 4px solid var(--mark);
  background: var(--pale); margin: .5rem 0; }
.wide { overflow-x: auto; max-width: 100%; margin: .5rem 0; }
table { border-collapse: collapse; font-size: .88rem; font-variant-numeric: tabular-nums; }
th, td { padding: .25rem .6rem; border-bottom: 1px solid var(--line); text-align: left;
  vertical-align: top; }
th { border-bottom: 2px solid var(--ink); white-space: nowrap; }
td.number, th.number { text-align: right; white-space: nowrap; }
th button { font: inherit; color: inherit; background: none; border: 0; padding: 0;
  cursor: pointer; text-align: inherit; }
th button::after { content: "\\2195"; color: var(--quiet); padding-left: .3em; font-size: .8em; }
th[aria-sort=ascending] button::after { content: "\\2191"; }
th[aria-sort=descending] button::after { content: "\\2193"; }
caption { text-align: left; color: var(--quiet); padding: .25rem 0; }
figure { margin: .75rem 0; break-inside: avoid; overflow-x: auto; }
figure svg { max-width: 100%; min-width: 34rem; height: auto; display: block; }
figcaption { color: var(--quiet); font-size: .88rem; }
details { margin: .5rem 0; } summary { cursor: pointer; }
code { font-size: .85em; overflow-wrap: anywhere; }
.caution { border: 1px solid #b5651d; border-left-width: 4px; padding: .5rem .75rem; }
@media print {
  body { font-size: 10pt; max-width: none; padding: 0; }
  nav, th button::after { display: none; }
  .wide, figure { overflow: visible; } figure svg { min-width: 0; }
  h2, h3, h4 { break-after: avoid; } tr { break-inside: avoid; }
  a { color: inherit; text-decoration: none; }
}
"""

SCRIPT = """
"use strict";
for (const heading of document.querySelectorAll("table.sortable th button")) {
  heading.addEventListener("click", () => {
    const cell = heading.closest("th"), table = cell.closest("table");
    const column = cell.cellIndex, body = table.tBodies[0];
    const rising = cell.getAttribute("aria-sort") !== "ascending";
    for (const other of table.querySelectorAll("th")) other.removeAttribute("aria-sort");
    cell.setAttribute("aria-sort", rising ? "ascending" : "descending");
    const key = row => {
      const at = row.cells[column];
      return at.dataset.value === undefined ? at.textContent.trim() : Number(at.dataset.value);
    };
    const order = (a, b) => {
      const left = key(a), right = key(b);
      if (typeof left !== typeof right) return typeof left === "number" ? -1 : 1;
      const way = typeof left === "number" ? left - right
        : left.localeCompare(right, "en", {numeric: true});
      return rising ? way : -way;
    };
    body.append(...Array.from(body.rows).sort(order));
  });
}
addEventListener("beforeprint", () => {
  for (const part of document.querySelectorAll("details")) part.open = true;
});
"""


def policy() -> str:
    """Return the page's content policy: no network, and no script but the one above."""
    digest = base64.b64encode(hashlib.sha256(SCRIPT.encode()).digest()).decode()
    return (
        f"default-src 'none'; style-src 'unsafe-inline'; script-src 'sha256-{digest}'; "
        "base-uri 'none'; form-action 'none'"
    )
