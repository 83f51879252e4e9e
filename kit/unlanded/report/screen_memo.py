"""The memo of a register: its devices ranked, and what to move on one board."""

from __future__ import annotations

import datetime
import hashlib
import math
from collections.abc import Sequence

import numpy as np

from ..case.screening import Screening
from ..reference.records import Source
from ..study.screening import POINTS
from ..units import show
from .figure import Figure, Line, Reference, even_axis
from .folder import Contents
from .margin import CAUTION, RULE
from .margin_figures import per_cent
from .memo import Block, Bullets, Caution, Memo, Paragraph, Part, Verbatim
from .tables import Column, Table

TOP = 25  # devices that the memo lists; the table of all is beside it

_COLUMNS = (
    Column("Rank", "", "right"), Column("Device"), Column("Board"), Column("Rated", "mA", "right"),
    Column("Circuits", "", "right"), Column("As numbers, all on", "mA", "right"),
    Column("Expected", "mA", "right"), Column("Worst credible", "mA", "right"),
    Column("Left to the trip band", "mA", "right"),
    Column("Left to the share", "mA", "right"), Column("Chance of a trip", "", "right"),
)


def ranking_table(screening: Screening, top: int | None = None) -> Table:
    """Devices, the most pressing first; the first `top`, or all of them."""
    order = screening.screened.ranking[:top]
    names = list(screening.register.devices)
    counts = np.bincount(screening.register.owner, minlength=len(names))
    rows = tuple(_row(screening, rank, int(k), names[k], int(counts[k]))
                 for rank, k in enumerate(order, 1))
    return Table(
        "ranking" if top is None else "most-pressing",
        "Devices by chance of a trip, then by the margin left.", _COLUMNS, rows,
        "Left: margin of the worst credible current, to what must not trip the device and to the "
        f"recommended share; below 0: exceeded. {RULE}")


def _row(screening: Screening, rank: int, k: int, name: str, circuits: int) -> tuple[str, ...]:
    s, register = screening.screened, screening.register
    worst = float(s.worst[k])
    return (
        str(rank), name, register.boards[k], f"{1e3 * register.devices[name].rated:g}",
        str(circuits), _ma(screening.arithmetic[k]), _ma(s.expected[k]), _ma(worst),
        _ma(s.non_operating[k] - worst), _ma(s.recommended[k] - worst), _chance(s.chance[k]))


def _chance(share: float) -> str:
    """A chance from few draws: of one digit under 1 %, and never nothing at all.

    >>> _chance(0.00048), _chance(0.0), _chance(0.043)
    ('0.05 %', 'none drawn', '4.3 %')
    """
    if share == 0:
        return "none drawn"
    return f"{100 * share:.1g} %" if 1e-4 <= share < 0.01 else per_cent(share)


def _ma(amperes: float) -> str:
    return f"{1e3 * amperes:.3g}".replace("-", "−") if math.isfinite(amperes) else "–"


def screen_figure(screening: Screening) -> Figure:
    """Every device's worst credible current against what must not trip it, in order."""
    s = screening.screened
    ranked = np.argsort(-s.worst / s.non_operating)
    worst = 100 * (s.worst / s.non_operating)[ranked]
    expected = 100 * (s.expected / s.non_operating)[ranked]
    count = np.arange(1.0, len(worst) + 1)
    over = int((worst > 100).sum())
    return Figure(
        key="screen", title="Standing current of every device, of what must not trip it",
        x=even_axis("Devices, the fullest first", "", 0.0, max(2.0, count[-1])),
        y=even_axis("Of the non-operating current", "%", 0.0, max(110.0, float(worst[0]))),
        caption="Worst credible and expected standing current of each device, as a share of the "
        "current that must not trip it.",
        alternative=f"Falling curves; {over} of {len(worst)} devices lie above 100 % at the worst "
        "credible current.",
        numbers=(f"above 100 %: {over} of {len(worst)} devices",),
        references=(Reference(100.0, "y", "must not trip"),),
        lines=(Line(count, worst, "worst credible", 1), Line(count, expected, "expected", 0)),
    )


def screen_summary(screening: Screening) -> str:
    """What was found, in three sentences."""
    s = screening.screened
    over = int((s.worst > s.non_operating).sum())
    shared = int((s.expected > s.recommended).sum())
    first = list(screening.register.devices)[int(s.ranking[0])]
    chance = float(s.chance[s.ranking[0]])
    how = (f"with a chance of a trip of {_chance(chance)} at a moment taken at random" if chance
           else "though no draw of it reaches the band in which it may trip")
    return (f"{len(s.worst)} devices with {len(screening.register.owner)} circuits. At the worst "
            f"credible standing current {over} of them are above what must not trip them, and "
            f"{shared} are expected above the recommended share. The most pressing is “{first}”, "
            f"{how}.")


def regrouping_part(screening: Screening) -> Part | None:
    """Which circuits to move on the board; None where none was regrouped."""
    found = screening.regrouping
    if found is None:
        return None
    words = (f"On this board the worst margin, of what a device may carry, goes from "
             f"{_share(found.worst_before)} to {_share(found.worst)} with {len(found.moves)} "
             "moves. ")
    words += ("No grouping is better by more than "
              f"{_share(found.alike)} of a device's limit, and none of that margin has fewer moves."
              if found.proved else
              f"The search ended early: the margin might be better by {100 * found.gap:.2g} % of a "
              f"device's limit, or the moves fewer by {found.moves_gap}.")
    if found.worst < 0:
        words += (" Even so a device stays above its limit: the board needs another device, or "
                  "less behind it.")
    blocks: list[Block] = [Paragraph(words), Paragraph(
        "A device carries the greatest of its lines' sums, everything on, against the recommended "
        "share (or, where none is, what must not trip it). Cancellation between lines is not "
        "counted on, since it goes when a circuit is off.")]
    if found.moves:
        moved = [(move.partition(": "), found.device_of[move]) for move in found.moves]
        rows = tuple((circuit, now, new) for (now, _, circuit), new in moved)
        blocks.append(Table("moves", "Circuits to move.",
                            (Column("Circuit"), Column("From"), Column("To")), rows))
    return Part("Regrouping", tuple(blocks))


def _share(margin: float) -> str:
    return "–" if math.isnan(margin) else f"{100 * margin:.0f} %".replace("-", "−")


def screen_part(screening: Screening) -> Part:
    """The ranked devices."""
    return Part("The register", (
        Paragraph(screen_summary(screening)), ranking_table(screening, TOP),
        screen_figure(screening)))


def screen_contents(
    screening: Screening, text: bytes, *, date: datetime.date, command: str
) -> Contents:
    """What the memo's folder is made from; `text` is the register as it was read."""
    register = screening.register
    fingerprint = hashlib.sha256(text).hexdigest()
    parts = (screen_part(screening),
             Part("Caution", (Caution("Before anybody relies on this", CAUTION),)),
             regrouping_part(screening), _assumptions(screening),
             Part("The register as read", (
                 Paragraph(f"SHA-256 of the file's bytes: {fingerprint}"),
                 Paragraph("This command makes the memo again:"), Verbatim(command))))
    memo = Memo(
        title=f"Residual-current margins of {len(register.devices)} devices", site="",
        case_file=register.name, fingerprint=fingerprint, date=date,
        parts=tuple(p for p in parts if p is not None))
    return Contents(memo, text, screen_results(screening), more_tables=(ranking_table(screening),),
                    case_name="register.csv")


def _assumptions(screening: Screening) -> Part:
    supply = screening.supply
    sources = _sources(screening)
    return Part("Assumptions and sources", (Bullets((
        f"The supply is {show(supply.voltage, 'V')} line to neutral, {show(supply.frequency, 'Hz')}"
        ", without harmonics; leakage above the supply's frequency is not in this screening.",
        "A cable leaks by its capacitance per metre and its length, all of it connected. Equipment "
        "leaks at an angle between resistive and capacitive that is drawn for each circuit.",
        "L1, L2 and L3 are 120° apart. A circuit whose line is not stated is on any of them. "
        "Balanced circuits leak nothing at the supply's frequency.",
        "A leakage that was measured stands for the circuit's cable and equipment.",
        f"Each device is drawn {POINTS} times, the same way every time; a chance below 1 % is an "
        "order of magnitude. “None drawn”: no draw reached the band in which the device may trip.",
        *(f"Source: {s}." for s in sources),
    )),))


def _sources(screening: Screening) -> Sequence[str]:
    found: dict[str, None] = {}
    for device in dict.fromkeys(screening.register.devices.values()):
        found.update(dict.fromkeys(map(str, device.sources)))
    return [*found, str(Source("equipment: trade tables, and limits of its standards",
                               "common practice"))]


def screen_results(screening: Screening) -> dict[str, object]:
    """For results.json."""
    s, names = screening.screened, list(screening.register.devices)
    found = screening.regrouping
    return {
        "devices": [{
            "device": names[k], "rated_A": screening.register.devices[names[k]].rated,
            "arithmetic_A": screening.arithmetic[k], "expected_A": s.expected[k],
            "worst_credible_A": s.worst[k], "non_operating_A": s.non_operating[k],
            "recommended_A": s.recommended[k], "chance": s.chance[k]} for k in s.ranking],
        "regrouping": None if found is None else {
            "device_of": found.device_of, "moves": list(found.moves), "worst": found.worst,
            "worst_before": found.worst_before, "gap": found.gap, "proved": found.proved},
    }
