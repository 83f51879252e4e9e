"""What a current log says of the device, as the memo gives it."""

from __future__ import annotations

from collections.abc import Iterator

from ..case.logs import Intake
from ..study.history import History
from ..study.residual import Margin
from ..units import show
from .margin_figures import log_figure, per_cent
from .memo import Block, Bullets, Paragraph
from .tables import Column, Table


def log_blocks(found: History, intake: Intake, margin: Margin) -> Iterator[Block]:
    """How the log was read, what it says, its largest steps and its picture."""
    yield Paragraph(f"The log has {intake.rows} rows. Left out, since they could not be read: "
                    f"{intake.bad_rows}. Of a time that was there already: {intake.repeated}. Out "
                    f"of order: {intake.disordered}.")
    if intake.bad:
        yield Bullets(tuple(map(str, intake.bad)))
    low, high = margin.credible
    current = found.log.current
    within = float(((current >= low) & (current <= high)).mean())
    words = (f"Recorded: {_span(found.recorded)}, with nothing for {_span(found.missing)} "
             f"(gaps: {found.gaps}); samples over range: {found.over_range}. Median "
             f"{show(found.percentiles[50], 'A')}, 95 % of the time at most "
             f"{show(found.percentiles[95], 'A')}, 99 % at most "
             f"{show(found.percentiles[99], 'A')}. The computed {show(low, 'A')} to "
             f"{show(high, 'A')} holds {per_cent(within)} of the samples. Above "
             f"{show(found.limit, 'A')} for {_span(found.above)}, the longest stretch "
             f"{_span(found.longest_above)}")
    if found.above > 0:
        hour = int(found.above_by_hour.argmax())
        words += (f", most of it from {hour}:00 to {hour + 1}:00 on the site's clock "
                  f"({found.log.zone})")
    yield Paragraph(f"{words}. {len(found.steps)} changes look like a load switching.")
    if found.steps:
        biggest = sorted(found.steps, key=lambda s: -abs(s.size))[:10]
        yield Table("log-steps", "The largest steps in the log.",
                    (Column("After", "h", "right"), Column("Hour of the day", "", "right"),
                     Column("Change", "mA", "right")),
                    tuple((f"{(s.seconds - found.log.seconds[0]) / 3600:.2f}",
                           f"{int(s.hour):02d}:{int(s.hour % 1 * 60):02d}", milliamperes(s.size))
                          for s in biggest))
    yield log_figure(found, margin)


def _span(seconds: float) -> str:
    """A length of time as a reader wants it.

    >>> _span(40), _span(720), _span(26700), _span(604800)
    ('40 s', '12 min', '7.42 h', '168 h')
    """
    if seconds < 60:
        return f"{seconds:.3g} s"
    return f"{seconds / 60:.3g} min" if seconds < 3600 else f"{seconds / 3600:.3g} h"


def milliamperes(value: float) -> str:
    """A current [A] as a cell of a table in mA.

    >>> milliamperes(-3.2846e-3)
    '−3.28'
    """
    return f"{1e3 * value:.3g}".replace("-", "−")
