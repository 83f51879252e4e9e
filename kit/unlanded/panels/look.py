"""How panels look, in both of JupyterLab's themes, and the pieces of HTML that they share."""

from __future__ import annotations

import html
from collections.abc import Iterable

from ..report.figure import Figure
from ..report.tables import Table

# Figures are white paper in either theme; the rest takes the theme's own colours.
STYLE = """<style>
.unlanded-panel { max-width: 1180px; }
.unlanded-body.unlanded-stale { opacity: 0.55; outline: 2px dashed #b26a00; }
.unlanded-alert { color: var(--jp-error-color1, #b00020); font-weight: 600; line-height: 1.4; }
.unlanded-said, .unlanded-caution, .unlanded-answer { color: var(--jp-content-font-color1);
  line-height: 1.45; }
.unlanded-caution { border-left: 4px solid #b26a00; padding: 2px 10px; margin: 6px 0; }
.unlanded-state { margin-left: 2em; }
.unlanded-answer { font-size: 105%; padding: 2px 0; }
table.unlanded-table { border-collapse: collapse; color: var(--jp-content-font-color1); }
table.unlanded-table caption { text-align: left; font-weight: 600; padding: 4px 0; }
table.unlanded-table th, table.unlanded-table td { padding: 2px 12px 2px 0; text-align: right;
  border-bottom: 1px solid var(--jp-border-color2, #ccc); white-space: nowrap; }
table.unlanded-table th:first-child, table.unlanded-table td:first-child,
table.unlanded-table .words { text-align: left; }
table.unlanded-table .words { white-space: pre-line; }
.unlanded-note { color: var(--jp-content-font-color2, #555); font-size: 90%; margin: 4px 0 0;
  max-width: 46em; line-height: 1.35; }
.unlanded-unseen { position: absolute; width: 1px; height: 1px; overflow: hidden;
  clip-path: inset(50%); white-space: nowrap; }
p.unlanded-said { margin: 4px 0; max-width: 75em; }
.unlanded-paper.bqplot.figure { background: #fff; --bq-axis-tick-text-fill: #333;
  --bq-axislabel-fill: #111; --bq-mainheading-fill: #111; --bq-axis-path-stroke: #555;
  --bq-axis-tick-stroke: #e2e2e2; --bq-plotarea-background-fill: #fff;
  --bq-axis-rect-stroke: #777; --bq-content-font-color: #111; --jp-ui-font-color1: #111; }
.unlanded-paper.bqplot.figure text.axislabel, .unlanded-paper.bqplot .mainheading { fill: #111; }
.unlanded-paper.bqplot .mainheading { font-size: 14px; font-weight: 600; }
</style>"""

CAUTION = (
    '<div class="unlanded-caution" role="note"><b>Caution.</b> A calculation never proves a '
    "conductor dead. Prove dead at the point of work with an instrument proved before and after. "
    "Local codes and licensed practice govern; energised tests are for qualified persons.</div>"
)


def alert(text: str) -> str:
    """A sentence that a screen reader speaks at once, as HTML."""
    return f'<span role="alert" class="unlanded-alert">{html.escape(text)}</span>'


def said(text: str) -> str:
    """A plain sentence as HTML."""
    return f'<span class="unlanded-said" role="status">{html.escape(text)}</span>'


def table_html(table: Table) -> str:
    """A table with its caption, headed columns and note, every cell escaped.

    >>> from unlanded.report.tables import Column
    >>> table_html(Table("t", "C.", (Column("a", "V"),), (("<b>",),))).count("&lt;b&gt;")
    1
    """
    left = [c.align == "left" for c in table.columns]
    head = "".join(f'<th scope="col" class="{_side(k)}">{html.escape(c.title)}</th>'
                   for c, k in zip(table.columns, left, strict=True))
    body = "".join("<tr>" + "".join(_cell(text, k) for text, k in zip(row, left, strict=True))
                   + "</tr>" for row in table.rows)
    note = f'<p class="unlanded-note">{html.escape(table.note)}</p>' if table.note else ""
    return (f'<table class="unlanded-table"><caption>{html.escape(table.caption)}</caption>'
            f"<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>{note}")


def caption_html(figure: Figure) -> str:
    """What stands under a picture; what it shows is said to a reader who cannot see it."""
    return (f'<p class="unlanded-note">{html.escape(figure.caption)}'
            f'<span class="unlanded-unseen"> {html.escape(figure.alternative)}</span></p>')


def sentences_html(sentences: Iterable[str]) -> str:
    """Each sentence as a paragraph."""
    return "".join(f'<p class="unlanded-said">{html.escape(s)}</p>' for s in sentences)


def _cell(text: str, left: bool) -> str:
    return f'<td class="{_side(left)}">{html.escape(text)}</td>'


def _side(left: bool) -> str:
    return "words" if left else "number"
