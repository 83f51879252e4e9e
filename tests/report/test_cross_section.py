from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from unlanded.physics.section import Conductor, Pipe, Plane, Section
from unlanded.report.cross_section import section_figure
from unlanded.report.figure import Figure
from unlanded.report.investigation import Investigation

PAIR = (Conductor("hot", -0.002, 0.0, 1e-3, 1.8e-3, 4.0),
        Conductor("open", 0.002, 0.0, 1e-3, 1.8e-3, 4.0))


def outline(figure: Figure, material: str) -> list[tuple[float, float, float]]:
    """Centre and radius of each disc of a material [mm]."""
    found = [a for a in figure.areas if a.material == material]
    return [((a.x.max() + a.x.min()) / 2, (a.y.max() + a.y.min()) / 2,
             (a.x.max() - a.x.min()) / 2) for a in found]


@pytest.mark.parametrize("surround", [None, Plane(-0.004), Pipe(0.008)])
def test_metal_and_covers_are_to_scale(surround: Plane | Pipe | None) -> None:
    figure = section_figure(Section(PAIR, surround), [230, 100])
    assert figure.to_scale
    np.testing.assert_allclose(outline(figure, "metal"), [(-2, 0, 1), (2, 0, 1)], rtol=1e-9,
                               atol=1e-12)
    np.testing.assert_allclose(outline(figure, "cover"), [(-2, 0, 1.8), (2, 0, 1.8)], rtol=1e-9,
                               atol=1e-12)


def test_the_shading_is_the_conductors_voltage_at_the_metal() -> None:
    figure = section_figure(Section(PAIR, Pipe(0.008)), [230, 100])
    field = figure.field
    assert field is not None
    for x, volts in ((-2.0, 230.0), (2.0, 100.0)):
        i, j = np.abs(field.y).argmin(), np.abs(field.x - x).argmin()
        assert field.values[i, j] == pytest.approx(volts, rel=1e-6, abs=0)
    assert np.isfinite(field.values).all()
    assert field.values.max() <= 230 * (1 + 1e-9)


def test_words_tell_names_voltages_and_the_surround() -> None:
    figure = section_figure(Section(PAIR, Pipe(0.008)), [230, 1e-6])
    assert figure.numbers == ("hot 230 V", "open 0 V")
    assert "in an earthed metal surround of 16 mm inside" in figure.alternative
    assert "hot 230 V and open 0 V" in figure.alternative
    assert "thickness is not to scale" in figure.caption


def test_a_scale_bar_in_the_readers_unit() -> None:
    section = Section(PAIR, Pipe(0.0127))
    assert any(n.text == "5 mm" for n in section_figure(section, [1, 0]).notes)
    inches = section_figure(section, [1, 0], customary=True)
    assert any(n.text == "0.2 in" for n in inches.notes)
    assert "of 1 in inside" in inches.alternative
    bar = next(a for a in inches.areas if a.material == "ink")
    assert bar.x.max() - bar.x.min() == pytest.approx(5.08, rel=1e-9, abs=0)


def test_every_name_of_a_crowded_section_has_its_own_row(sites: tuple[Investigation, ...]) -> None:
    for site in sites:
        section = site.run.section
        figure = section_figure(section, np.linspace(0, 230, len(section.names)))
        for side in ("left", "right"):
            heights = sorted(n.y for n in figure.notes if n.align == side and n.target)
            assert all(b - a > 0.02 * (figure.y.high - figure.y.low)
                       for a, b in pairwise(heights))
        assert all(figure.x.low <= n.x <= figure.x.high for n in figure.notes)


def test_wide_sections_have_their_names_above() -> None:
    row = tuple(Conductor(f"conductor {i}", 0.02 * i, 0.0, 1e-3) for i in range(5))
    figure = section_figure(Section(row), [1, 2, 3, 4, 5])
    names = [n for n in figure.notes if n.target]
    assert [n.align for n in names] == ["middle"] * 5
    assert len({(n.x, n.y) for n in names}) == 5


def test_a_screen_that_floats_is_at_its_own_potential() -> None:
    section = Section(PAIR, Pipe(0.008))
    figure = section_figure(section, [230, 100], screen=("earthed at no end", 60j))
    assert "in a screen of 16 mm inside, earthed at no end, at 60 V" in figure.caption
    assert figure.field is not None
    x, y, values = figure.field.x, figure.field.y, figure.field.values
    at_wall = values[np.abs(y).argmin(), np.abs(x + 8).argmin()]
    assert at_wall == pytest.approx(60, rel=0.02, abs=0)
    # Everything, screen and all, lifted by the same voltage has the same differences.
    lifted = section_figure(section, [230 + 50, 100 + 50], screen=("", 50.0)).field
    plain = section_figure(section, [230, 100]).field
    assert lifted is not None
    assert plain is not None
    within = np.hypot(x, y[:, None]) < 7.9
    np.testing.assert_allclose(lifted.values[within], plain.values[within] + 50, rtol=1e-9)
