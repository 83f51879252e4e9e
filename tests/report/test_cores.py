from __future__ import annotations

import pytest

from unlanded.case.loading import read_case
from unlanded.report.cores import core_sizes, core_sources, core_wires, permittivity_words
from unlanded.report.investigation import Investigation

HEAD = '''title = "T"
[supply]
voltage = "230 V"
frequency = "50 Hz"
[run]
length = "10 m"
[run.ends.near]
a = "L"
c = "earth"
'''
TWIN = HEAD + '''[run.cable]
layout = "flat twin and earth"
cores = ["a", "c", "b"]
type = "PVC 0.6/1 kV"
conductor = "2.5 mm²"
stranding = "solid"
earth_conductor = "1.5 mm²"
'''
FREE = HEAD + '''[run.cable]
layout = "free"
[[run.cable.conductors]]
name = "a"
x = "0 mm"
y = "0 mm"
diameter = "2 mm"
cover_diameter = "4 mm"
permittivity = {low = 2, likely = 3, high = 4}
[[run.cable.conductors]]
name = "c"
x = "9 mm"
y = "0 mm"
diameter = "2 mm"
'''


def test_the_earth_of_a_flat_cable_is_bare_and_of_its_own_size() -> None:
    cable = read_case(TWIN).content.run.cable
    assert list(core_wires(cable)) == ["a", "b"]
    assert {n: s.name for n, s in core_sizes(cable).items()} == {
        "a": "2.5 mm²", "b": "2.5 mm²", "c": "1.5 mm²"}


def test_conductors_drawn_freely_have_no_trade_size() -> None:
    cable = read_case(FREE).content.run.cable
    assert core_wires(cable) == core_sizes(cable) == {}
    assert permittivity_words(cable) == (
        "The cover of a: relative permittivity 3 (2 to 4), as the case states.",)
    assert [what for what, _ in core_sources(cable)] == ["resistivity of copper"]


def test_permittivity_with_its_range_and_source(quay: Investigation, mill: Investigation) -> None:
    metric, = permittivity_words(quay.case.content.run.cable)
    assert metric == ("Covers of PVC, 0.8 mm thick: relative permittivity 4.8 (3.5 to 6.5), cable "
                      "makers' material tables [common practice, no source].")
    mils, = permittivity_words(mill.case.content.run.cable, customary=True)
    assert mils.startswith("Covers of PVC, 30 mil thick: ")


@pytest.mark.parametrize(("change", "what"), [
    ("", {"permittivity of PVC", "thickness of the covers of PVC 0.6/1 kV"}),
    ('thickness = "1 mm"\n', {"permittivity of PVC"}),
    ("permittivity = 5\n", {"thickness of the covers of PVC 0.6/1 kV"}),
])
def test_what_the_case_states_has_no_other_source(change: str, what: set[str]) -> None:
    cable = read_case(TWIN + change).content.run.cable
    found = {w for w, _ in core_sources(cable)}
    assert {w for w in found if "mm²" not in w} == what
