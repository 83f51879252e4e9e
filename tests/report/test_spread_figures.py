from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from unlanded.report.paper import draw
from unlanded.report.spread_figures import distribution_figure, level_figure, sensitivity_figure
from unlanded.study.spread import Sensitivity

FOUND = Sensitivity(("length", "supply", "gap"), np.array([[0.1, 0.6, 0.0]]),
                    np.array([[0.15, 0.8, 0.05]]))


def test_bars_go_from_the_input_that_matters_most(tmp_path: Path) -> None:
    figure = sensitivity_figure(FOUND, "the reading")
    assert [text for _, text in figure.y.ticks] == ["supply", "length", "gap"]
    assert figure.numbers == ("supply 80 %", "length 15 %", "gap 5 %")
    assert [float(b.x[1]) for b in figure.bands] == [80.0, 15.0, 5.0]
    assert figure.points[0].x.tolist() == [60.0, 10.0, 0.0]
    draw(figure, tmp_path / "bars.svg")
    assert (tmp_path / "bars.svg").stat().st_size > 1000


def test_shares_outside_0_to_1_are_an_estimators_noise() -> None:
    noisy = Sensitivity(("a",), np.array([[-0.01]]), np.array([[1.02]]))
    figure = sensitivity_figure(noisy, "it")
    assert figure.points[0].x.tolist() == [0.0]
    assert float(figure.bands[0].x[1]) == 100.0


def test_distribution_shades_its_interval(tmp_path: Path) -> None:
    sample = np.random.default_rng(1).normal(80.0, 4.0, 1000)
    figure = distribution_figure(sample, (72.2, 87.8), 80.0, what="the reading", unit="V",
                                 coverage=0.95)
    (band,) = figure.bands
    assert (band.x.min(), band.x.max()) == (72.2, 87.8)
    (line,) = figure.lines
    assert line.y.max() == 1.0
    assert abs(float(line.x[line.y.argmax()]) - 80.0) < 2.0
    assert "72.2 V to 87.8 V" in figure.caption
    draw(figure, tmp_path / "curve.png")


def test_a_size_is_never_drawn_below_0() -> None:
    # The half-normal density is highest at 0, and exp(-1/2) of that at one standard deviation.
    sample = np.abs(np.random.default_rng(1).normal(0.0, 10.0, 4000))
    (line,) = distribution_figure(sample, (0.3, 22.4), 6.7, what="the reading", unit="V",
                                  coverage=0.95).lines
    assert line.x[0] == 0.0
    assert line.y[0] > 0.9
    at = float(np.interp(10.0, line.x, line.y) / line.y[0])
    assert at == pytest.approx(np.exp(-0.5), rel=0.06, abs=0)


def test_level_against_length_with_its_limits(tmp_path: Path) -> None:
    lengths = np.linspace(10, 100, 10)
    figure = level_figure(lengths, lengths, (0.9 * lengths, 1.1 * lengths), name="Relay K1",
                          unit="V", limits=(34.5, 195.5), length=50.0, length_unit="m",
                          coverage=0.95, states=("drops out", "may hold", "holds"))
    assert figure.key == "operation"
    assert [r.label for r in figure.references] == ["this run, 50 m",
                                                    "drops out at or under 34.5 V"]
    assert figure.numbers == ("Relay K1: 50 V",)
    draw(figure, tmp_path / "level.svg")


def test_a_lamps_current_is_in_microamperes() -> None:
    lengths = np.linspace(10, 100, 10)
    figure = level_figure(lengths, lengths * 1e-6, (lengths * 9e-7, lengths * 1.1e-6), name="lamp",
                          unit="A", limits=(10e-6, 0.5e-3), length=50.0, length_unit="m",
                          coverage=0.95, states=("dark", "may glow", "glows"))
    assert figure.y.unit == "µA"
    assert float(figure.lines[0].y[-1]) == pytest.approx(100.0, rel=1e-12, abs=0)
