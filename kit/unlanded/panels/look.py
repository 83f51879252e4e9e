"""How panels look, in both of JupyterLab's themes, and the pieces of HTML that they share."""

from __future__ import annotations

import html
from collections.abc import Sequence

# Figures are white paper in either theme; the rest takes the theme's own colours.
STYLE = """<style>
.unlanded-panel { max-width: 1180px; }
.unlanded-body.unlanded-stale { opacity: 0.55; outline: 2px dashed #b26a00; }
.unlanded-alert { color: var(--jp-error-color1, #b00020); font-weight: 600; line-height: 1.4; }
.unlanded-said, .unlanded-caution, .unlanded-answer { color: var(--jp-content-font-color1);
  line-height: 1.45; }
.unlanded-caution { border-left: 4px solid #b26a00; padding: 2px 10px; margin: 6px 0; }
.unlanded-answer { font-size: 105%; padding: 2px 0; }
table.unlanded-table { border-collapse: collapse; color: var(--jp-content-font-color1); }
table.unlanded-table caption { text-align: left; font-weight: 600; padding: 4px 0; }
table.unlanded-table th, table.unlanded-table td { padding: 2px 12px 2px 0; text-align: right;
  border-bottom: 1px solid var(--jp-border-color2, #ccc); white-space: nowrap; }
table.unlanded-table th:first-child, table.unlanded-table td:first-child,
table.unlanded-table td.words { text-align: left; }
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


def said(text: str) -> str:
    """A plain sentence as HTML."""
    return f'<span class="unlanded-said" role="status">{html.escape(text)}</span>'


def table_html(caption: str, titles: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table with a caption and headed columns, every cell escaped.

    >>> table_html("C", ["a"], [["<b>"]]).count("&lt;b&gt;")
    1
    """
    head = "".join(f'<th scope="col">{html.escape(t)}</th>' for t in titles)
    body = "".join(
        "<tr>" + "".join(f"<td>{html.escape(cell)}</td>" for cell in row) + "</tr>" for row in rows
    )
    return (f'<table class="unlanded-table"><caption>{html.escape(caption)}</caption>'
            f"<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>")
