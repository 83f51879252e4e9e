from __future__ import annotations

from unlanded.report.investigation import Investigation


def test_low_and_high_are_the_ends_of_the_permittivity(quay: Investigation) -> None:
    ends = [run.section.conductors[0].cover_permittivity for run in quay.runs]
    assert ends == [4.8, 3.5, 6.5]
    assert quay.low.length == quay.run.length == 85


def test_bands_hold_the_readings(sites: tuple[Investigation, ...]) -> None:
    for site in sites:
        numbers = [r for r in site.sheet.rows if r.reading.text.endswith(" V")]
        assert numbers
        assert all(r.low.value <= r.reading.value <= r.high.value for r in numbers)


def test_units_follow_the_case(quay: Investigation, mill: Investigation) -> None:
    assert not quay.customary
    assert mill.customary


def test_instruments_are_those_of_the_case(quay: Investigation) -> None:
    assert [t.key for t in quay.instruments] == list(quay.case.content.sheet.instruments)
    assert quay.sheet.instruments == quay.instruments
