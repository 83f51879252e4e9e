"""The cable of a case: what each layout needs, and what is looked up for it."""

from __future__ import annotations

import pytest

from case_text import PAIR, changed, refusals, site
from unlanded.case.cable import Cable, InConduit
from unlanded.case.loading import read_case

QUAY, HERON, ALDER = site("tern-quay"), site("heron-house"), site("alder-mill")
TYPE = 'type = "H05VV"'


def test_type_gives_material_and_thickness() -> None:
    cable = read_case(QUAY).content.run.cable
    assert isinstance(cable, Cable)
    assert cable.insulation == "PVC"
    # IEC 60227-5, 2.5 mm²: 0.8 mm (from memory)
    assert cable.cover == pytest.approx(0.8e-3, rel=1e-12, abs=0)
    # the trade's range of PVC (common practice, no source)
    assert [cable.cover_permittivity(w) for w in ("low", "likely", "high")] == [3.5, 4.8, 6.5]


def test_material_and_thickness_may_be_given() -> None:
    cable = read_case(ALDER).content.run.cable
    assert isinstance(cable, Cable)
    assert cable.cover == pytest.approx(0.030 * 25.4e-3, rel=1e-12, abs=0)
    narrow = changed(ALDER, ('insulation = "PVC"',
                             'insulation = "PVC"\npermittivity = {low = 4, likely = 4.5}'))
    cable = read_case(narrow).content.run.cable
    assert isinstance(cable, Cable)
    assert [cable.cover_permittivity(w) for w in ("low", "likely", "high")] == [4.0, 4.5, 4.5]


def test_an_unlike_single_differs_from_the_rest() -> None:
    cable = read_case(HERON).content.run.cable
    assert isinstance(cable, InConduit)
    assert cable.wire("green-yellow").conductor.name == "4 mm²"
    assert cable.wire("brown").conductor.name == "2.5 mm²"


@pytest.mark.parametrize(("change", "says"), [
    ((TYPE, 'type = "H05W"'),
     'run.cable.type: is not a known cable type; given H05W. (did you mean "H05V"?)'),
    ((TYPE, ""), 'run.cable.insulation: is missing: give the cable "type", or "insulation" and '
                 '"thickness". (for example type = "H07V")'),
    ((TYPE, 'insulation = "PVX"'),
     'run.cable.insulation: is not a known material; given PVX. (did you mean "PVC"?)'),
    ((TYPE, 'insulation = "PVC"'),
     'run.cable.thickness: is missing. (for example thickness = "0.8 mm")'),
    ((TYPE, 'insulation = "bare"\nthickness = "1 mm"'),
     "run.cable.insulation: is bare, and a bare wire has no thickness or permittivity."),
    (('"2.5 mm²"', '"2.6 mm²"'), "run.cable.conductor: is not in the table of flexible conductors;"
                                 ' given 2.6 mm². (the nearest is "2.5 mm²")'),
    (('"2.5 mm²"', "2.5"), "run.cable.conductor: must be an area in mm² or a gauge in AWG, in "
                           'quotes; given 2.5. (for example "2.5 mm²")'),
    (('"2.5 mm²"', '"10 mm²"'),
     "run.cable.thickness: is not in the table of H05VV for this conductor; given 10 mm². (give the"
     " thickness, or one of 0.75 mm², 1 mm², 1.5 mm², 2.5 mm²)"),
    (('"flexible"', '"flex"'), "run.cable.stranding: must be solid, stranded or flexible; given "
                               'flex. (did you mean "flexible"?)'),
    (('"laid up"', '"laidup"'),
     "run.cable.layout: must be laid up, control, flat twin and earth, singles, in conduit or free;"
     ' given laidup. (did you mean "laid up"?)'),
    (('layout = "laid up"', ""),
     'run.cable.layout: is missing. (for example layout = "laid up")'),
    (('"laid up"', '"control"'),
     "run.cable: control: takes 7 (1 + 6) or 19 (1 + 6 + 12) cores; given 4."),
    (('"laid up"', '"flat twin and earth"'),
     'run.cable.earth_conductor: is missing. (for example earth_conductor = "1.5 mm²")'),
])  # fmt: skip
def test_a_mistake_in_the_cable_is_one_sentence(change: tuple[str, str], says: str) -> None:
    (said,) = refusals(changed(QUAY, change))
    assert said.split(", ", 1)[1] == says


@pytest.mark.parametrize(("change", "says"), [
    (("seed = 4", "seed = -4"), "run.cable.seed: must be a whole number from 0 to 4294967295"),
    (('"metal"', '"steel"'), "run.cable.wall: must be metal or plastic; given steel."),
    (("green-yellow = {type", "gren-yellow = {type"), 'did you mean "green-yellow"?'),
    (('bore = "21 mm"', ""), 'run.cable.bore: is missing. (for example bore = "15.8 mm")'),
])  # fmt: skip
def test_a_mistake_in_a_conduit_is_one_sentence(change: tuple[str, str], says: str) -> None:
    (said,) = refusals(changed(HERON, change))
    assert says in said


@pytest.mark.parametrize(("change", "says"), [
    (('cover_diameter = "4 mm"\n', ""), "[1].cover_diameter: is missing: cover_diameter and "),
    (("permittivity = 3.0\n", ""), "[1].permittivity: is missing: cover_diameter and permittivity"),
    (('cover_diameter = "4 mm"', 'cover_diameter = "1 mm"'),
     "[1].cover_diameter: must be at least the metal's 2 mm; given 1 mm."),
    (('name = "a"\n', ""), "[1].name: is missing."),
    (('x = "0 mm"', 'x = "11 m"'), "[1].x: must be −10 m to 10 m; given 11 m."),
])  # fmt: skip
def test_a_mistake_in_a_free_conductor_is_told_at_it(change: tuple[str, str], says: str) -> None:
    (said,) = refusals(changed(PAIR, change))
    assert f"run.cable.conductors{says}" in said


def test_a_free_layout_has_conductors() -> None:
    assert any("run.cable.conductors: must be 1 to 61 conductors; given 0." in s
               for s in refusals('title="x"\n[run.cable]\nlayout = "free"\nconductors = []'))
