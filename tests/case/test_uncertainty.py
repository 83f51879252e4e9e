"""From a case to what varies of its run."""

from __future__ import annotations

import numpy as np
import pytest

from case_text import PAIR, SITES, changed, refusals
from unlanded.case.build import build_run
from unlanded.case.loading import load_case, read_case
from unlanded.case.uncertainty import uncertain_run
from unlanded.physics.capacitance import capacitance_matrix
from unlanded.study.spread import limits, quasi_random

CORD = """title = "cord"
[supply]
voltage = "230 V"
frequency = "50 Hz"
[run]
length = "20 m"
[run.cable]
layout = "singles"
cores = ["a", "b", "c"]
stranding = "solid"
conductor = "2.5 mm²"
type = "H07V"
spacing = "10 mm"
[run.surround]
kind = "plane"
gap = "2 mm"
[run.ends.near]
a = "L"
"""


def names(text: str) -> list[str]:
    return [i.name for i in uncertain_run(read_case(text)).inputs]


def test_covers_have_the_range_of_their_material() -> None:
    case = load_case(SITES / "tern-quay.toml")
    found = uncertain_run(case)
    assert names(case.text) == ["permittivity of the covers"]
    np.testing.assert_allclose(limits(found.inputs[0].distribution), (3.5, 6.5), rtol=2e-3)
    assert found.run.matrix == pytest.approx(build_run(case).matrix, rel=1e-12, abs=0)


def test_what_has_no_range_does_not_vary() -> None:
    assert names(PAIR) == []
    ranged = changed(PAIR, (
        "permittivity = 3.0", "permittivity = {likely = 3.0, low = 2, high = 4}"))
    assert names(ranged) == ["permittivity of the covers"]
    two = changed(ranged, (
        "permittivity = 3.0", "permittivity = {likely = 5.0, low = 4, high = 6}"))
    assert names(two) == ["permittivity of the covers of a", "permittivity of the covers of b"]
    assert names(two + "[spread]\npermittivity = {low = 2.5, high = 3.5}\n") == [
        "permittivity of the covers"]


def test_the_same_insulation_is_the_same_in_every_draw() -> None:
    found = uncertain_run(read_case(CORD))
    assert found.section is not None
    for row, matrix in zip(([3.6], [6.2]), found.section.matrices(np.array([[3.6], [6.2]])),
                           strict=True):
        section = found.run.section
        made = type(section)(tuple(
            type(c)(c.name, c.x, c.y, c.radius, c.outer, row[0]) for c in section.conductors),
            section.surround)
        assert np.all(np.abs(matrix / capacitance_matrix(made) - 1) < 4e-3)


def test_dimensions_build_the_section_anew() -> None:
    text = CORD + '[spread]\nspacing = {low = "8 mm", high = "14 mm"}\ngap = "50 %"\n'
    found = uncertain_run(read_case(text))
    assert [i.name for i in found.inputs] == [
        "permittivity of the covers", "spacing", "gap to the earthed surround"]
    assert found.section is not None
    matrices = found.section.matrices(np.array([[4.8, 10e-3, 2e-3], [4.8, 12e-3, 2e-3]]))
    assert np.all(np.abs(matrices[0] / found.run.matrix - 1) < 4e-3)
    assert abs(matrices[1, 0, 1]) < abs(matrices[0, 0, 1])
    thick = uncertain_run(read_case(
        CORD + '[spread]\nthickness = {low = "0.7 mm", high = "1 mm"}\n'))
    assert [i.name for i in thick.inputs][1] == "thickness of the covers"


def test_supply_length_and_loads() -> None:
    text = changed(CORD, ('a = "L"', 'a = "L"\nb = {load = {name = "coil", resistance = "9 kohm"}, '
                          'to = "N"}'))
    text += ('[spread]\nlength = "5 %"\nvoltage = {low = "218 V", high = "242 V"}\n'
             'loads = {"coil" = "20 %"}\n')
    found = uncertain_run(read_case(text))
    batch = found.at(quasi_random(found.inputs, 64))
    assert 0.945 < batch.supply.min() < batch.supply.max() < 1.055
    assert 19 < batch.length.min() < batch.length.max() < 21
    assert 0.8 < batch.load["coil"].min() < 0.85 < 1.15 < batch.load["coil"].max() < 1.2


def test_singles_in_a_conduit_lie_at_random() -> None:
    text = load_case(SITES / "heron-house.toml").text
    assert names(text) == ["permittivity of the covers", "how the singles lie"]
    assert names(text + "\n[spread]\narrangement = false\n") == ["permittivity of the covers"]


SCREENED = changed(CORD, ('layout = "singles"', 'layout = "laid up"'), ('spacing = "10 mm"\n', ""),
                   ('kind = "plane"\ngap = "2 mm"', 'kind = "screen"\nearthed = "none"'),
                   ("H07V", "H05VV"), ("solid", "flexible"))
OUTSIDE = "capacitance of the screen to earth"


def test_what_a_floating_screen_has_to_earth_is_not_known_unless_said() -> None:
    assert names(SCREENED)[-1] == OUTSIDE
    given = changed(SCREENED, ('"none"', '"none"\nto_earth = "120 pF/m"'))
    assert OUTSIDE not in names(given)
    spread = given + '[spread]\nto_earth = {tolerance = "20 %"}\n'
    found = uncertain_run(read_case(spread))
    np.testing.assert_allclose(limits(found.inputs[-1].distribution), (96e-12, 144e-12), rtol=2e-3)
    assert OUTSIDE not in names(changed(SCREENED, ('"none"', '"near"')))
    batch = found.draws(8)
    outside = batch.capacitance.sum(axis=2)[:, -1]
    assert outside.min() > 95e-12
    assert outside.max() > 1.1 * outside.min()
    # Within the screen the cores have what the section gives them, draw by draw.
    inside = np.abs(batch.capacitance[:, :3].sum(axis=2))
    assert inside.max() < 1e-12 * batch.capacitance.max()


@pytest.mark.parametrize("text", [
    CORD, changed(SCREENED, ('"none"', '"both"')), changed(SCREENED, ('"none"', '"far"'))])
def test_a_spread_of_a_screen_that_does_not_float_is_refused(text: str) -> None:
    (said,) = refusals(text + '[spread]\nto_earth = "20 %"\n')
    assert "spread.to_earth: is of a screen that is earthed at no end, and there is none." in said


def test_sizes_vary_in_a_conduit() -> None:
    text = load_case(SITES / "heron-house.toml").text
    spread = '\n[spread]\nthickness = "10 %"\nbore = {low = "20 mm", high = "22 mm"}\n'
    assert names(text + spread) == ["permittivity of the covers", "thickness of the covers",
                                    "bore of the conduit", "how the singles lie"]
    # With the arrangement known each draw is the case itself, its sizes written in.
    found = uncertain_run(read_case(text + spread + "arrangement = false\n"))
    assert [i.name for i in found.inputs][-1] == "bore of the conduit"
    assert found.section is not None
    drawn = found.section.matrices(np.array([[4.8, 0.8e-3, 21e-3], [4.8, 0.86e-3, 20.4e-3]]))
    written = [text, changed(text, ('bore = "21 mm"', 'bore = "20.4 mm"'), (
        'type = "H07V"\nconductor', 'insulation = "PVC"\nthickness = "0.86 mm"\nconductor'))]
    for matrix, case in zip(drawn, written, strict=True):
        exact = build_run(read_case(case)).matrix
        assert np.all(np.abs(matrix - exact) <= 6e-3 * np.sqrt(np.outer(*[np.diag(exact)] * 2)))


def test_the_bore_of_a_pipe_varies() -> None:
    pipe = changed(CORD, ('kind = "plane"', 'kind = "pipe"\nbore = "40 mm"'))
    found = uncertain_run(read_case(pipe + '[spread]\nbore = "5 %"\n'))
    assert [i.name for i in found.inputs] == ["permittivity of the covers", "bore"]
    assert found.section is not None
    (matrix,) = found.section.matrices(np.array([[4.8, 39e-3]]))
    exact = build_run(read_case(changed(pipe, ('"40 mm"', '"39 mm"')))).matrix
    assert np.all(np.abs(matrix / exact - 1) < 6e-3)


@pytest.mark.parametrize(("spread", "key"), [
    ('bore = {low = "8 mm", high = "21 mm"}',
     "spread.bore: allows sizes that do not fit: in conduit: 5 singles do not go into"),
    ('bore = "60 %"', "spread.bore: allows sizes that do not fit: in conduit: 5 singles do not go"),
    ('thickness = {low = "0.5 mm", high = "9 mm"}', "spread.thickness: allows sizes that do not f"),
    ('thickness = "40 %"\nbore = "50 %"', "spread: allows sizes that do not fit: in conduit: 5 si"),
])
def test_sizes_that_do_not_fit_are_told_before_the_draws(spread: str, key: str) -> None:
    text = (SITES / "heron-house.toml").read_text(encoding="utf-8")
    assert refusals(f'{text}\n[spread]\nbore = "20 %"\nthickness = "20 %"\n') == []
    (said,) = refusals(f"{text}\n[spread]\n{spread}\n")
    assert key in said
    assert " m inner" not in said  # in millimetres


def test_rows_and_pipes_are_held_to_the_sizes_that_they_may_have() -> None:
    assert refusals(CORD + '[spread]\nspacing = "50 %"\n') == []
    (said, *_) = refusals(CORD + '[spread]\nspacing = "70 %"\n')
    assert "spread.spacing: allows sizes that do not fit: " in said
    pipe = changed(CORD, ('kind = "plane"\ngap = "2 mm"', 'kind = "pipe"\nbore = "60 mm"\ngap ='
                                                          ' "2 mm"'))
    assert refusals(pipe + '[spread]\nbore = "10 %"\n') == []
    (said, *_) = refusals(pipe + '[spread]\nbore = "80 %"\n')
    assert "spread.bore: allows sizes that do not fit: " in said


def test_a_share_of_nothing_is_no_range() -> None:
    flat = changed(CORD, ('gap = "2 mm"', 'gap = "0 mm"'))
    assert refusals(flat + '[spread]\ngap = {low = "0 mm", high = "1 mm"}\n') == []
    (said,) = refusals(flat + '[spread]\ngap = "10 %"\n')
    assert "spread.gap: is a share of the case's own value, which is 0. (give low and high)" in said
    site = changed((SITES / "chalk-hill.toml").read_text(encoding="utf-8"),
                   ('earthed = "none"\n\n', 'earthed = "none"\nto_earth = "0 F/m"\n\n'))
    (said,) = refusals(site + '\n[spread]\nto_earth = "10 %"\n')
    assert "spread.to_earth: is a share of the case's own value, which is 0." in said


def test_over_a_plane_a_conduit_is_built_anew() -> None:
    text = changed(load_case(SITES / "heron-house.toml").text, (
        'wall = "metal"', 'wall = "plastic"'))
    plane = '\n[run.surround]\nkind = "plane"\ngap = "2 mm"\n'
    assert names(text + plane) == ["permittivity of the covers"]
    assert names(text + plane + '[spread]\nbore = "5 %"\ngap = "10 %"\n') == [
        "permittivity of the covers", "bore", "gap to the earthed surround"]
