from __future__ import annotations

import numpy as np
import pytest

from unlanded.errors import Refused
from unlanded.report.circuit import circuit_part
from unlanded.report.expected import expected_part
from unlanded.report.figure import Figure
from unlanded.report.figures import (
    InstrumentMark,
    length_figure,
    loading_figure,
    sheet_figure,
    sheet_marks,
)
from unlanded.report.investigation import Investigation
from unlanded.study.readings import Pair, usual_pairs

PAIR = Pair("black@near")
OHMS = np.geomspace(1e3, 1e9, 25)


def every_array(figure: Figure) -> list[np.ndarray]:
    series = (*figure.lines, *figure.bands, *figure.points, *figure.areas)
    arrays = [v for s in series for v in vars(s).values() if isinstance(v, np.ndarray)]
    return [*arrays, figure.field.values] if figure.field else arrays


def test_figures_of_every_site_are_whole(sites: tuple[Investigation, ...]) -> None:
    for site in sites:
        blocks = (*circuit_part(site).blocks, *expected_part(site).blocks)
        figures = [b for b in blocks if isinstance(b, Figure)]
        assert {f.key for f in figures} == {"section", "sheet", "loading", "length"}
        for figure in figures:
            assert all(np.isfinite(a).all() for a in every_array(figure))
            assert all(n in figure.alternative for n in figure.numbers)
            for note in figure.notes:
                assert figure.x.low <= note.x <= figure.x.high
                assert figure.y.low <= note.y <= figure.y.high
            for line in (x for x in figure.lines if x.style is not None):
                assert line.x.max() <= figure.x.high * (1 + 1e-9)
                assert line.y.max() <= figure.y.high * (1 + 1e-9)
            for points in figure.points:
                assert points.x.min() >= figure.x.low
                assert points.x.max() <= figure.x.high


def test_loading_figure_says_its_ends_and_marks() -> None:
    volts = 100 / (1 + 1e6 / OHMS)
    figure = loading_figure(PAIR, OHMS, volts, [InstrumentMark("meter", 1e6, 50.0, "50.0 V")],
                            (0.9 * volts, 1.1 * volts))
    assert figure.alternative == ("Curve rising from 99.9 mV at 1 kΩ to 99.9 V at 1 GΩ. "
                                  "Instruments: meter: 50.0 V.")
    assert figure.y.high >= 109.9
    note, = figure.notes
    assert note.text == "meter: 50.0 V"
    assert note.target == pytest.approx((1e6, 50), rel=1e-9, abs=0)
    assert "not known of the inputs" in figure.caption
    assert "Shaded" not in loading_figure(PAIR, OHMS, volts, []).caption


def test_an_instrument_outside_the_axis_is_not_marked() -> None:
    figure = loading_figure(PAIR, OHMS, OHMS / 1e7, [InstrumentMark("short", 1.0, 0.1, "0.1 V")])
    assert figure.points == ()
    assert figure.notes == ()


def test_length_figure_in_feet() -> None:
    metres = np.array([0.0, 30.48, 60.96])
    figure = length_figure(PAIR, metres, {"meter": [0, 10, 20]}, length=30.48, customary=True)
    assert figure.x.title == "Run length [ft]"
    np.testing.assert_allclose(figure.lines[0].x, [0, 100, 200], rtol=1e-12)
    assert figure.references[0].label == "this run, 100 ft"
    assert figure.references[0].value == pytest.approx(100, rel=1e-12, abs=0)
    assert figure.numbers == ("meter 10 V",)


def test_length_figure_needs_an_instrument() -> None:
    with pytest.raises(Refused, match="at least one instrument"):
        length_figure(PAIR, [1, 2], {}, length=1.0)


def test_marks_are_at_the_instruments_own_impedance(quay: Investigation) -> None:
    marks = {m.name: m for m in sheet_marks(quay.sheet, PAIR)}
    # 10 MΩ beside 100 pF at 50 Hz: 31.8 MΩ of reactance
    assert marks["digital meter, 10 MΩ"].impedance == pytest.approx(
        1 / abs(1 / 10e6 + 2j * np.pi * 50 * 100e-12), rel=1e-9, abs=0)
    assert marks["low-impedance meter, 3 kΩ"].impedance == pytest.approx(3e3, rel=1e-9, abs=0)
    assert [m.impedance for m in marks.values()] == sorted(m.impedance for m in marks.values())


def test_sheet_figure_has_a_row_for_each_pair_and_a_marker_for_each_reading(
    quay: Investigation
) -> None:
    pairs = [PAIR, Pair("brown@near")]
    figure = sheet_figure(quay.sheet, pairs, names=["spare", "live"])
    assert [t for _, t in figure.y.ticks] == ["spare", "live"]
    assert figure.y.turned
    assert sum(len(p.x) for p in figure.points) == 2 * len(quay.instruments)
    assert any(p.hollow for p in figure.points)
    assert len({p.label for p in figure.points if p.label}) == len(quay.instruments)
    assert f"spare, {quay.instruments[0].name}: " in figure.alternative
    for points in figure.points:
        assert points.x_low is not None
        assert points.x_high is not None
        assert (points.x_low <= points.x_high).all()


def test_sheet_figure_takes_what_a_page_can_show(moor: Investigation) -> None:
    with pytest.raises(Refused, match="takes 1 to 16 pairs; given 0"):
        sheet_figure(moor.sheet, [])
    with pytest.raises(Refused, match="takes 1 to 16 pairs"):
        sheet_figure(moor.sheet, list(usual_pairs(moor.run)))
