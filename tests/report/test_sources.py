from __future__ import annotations

from unlanded.report.investigation import Investigation
from unlanded.report.memo import Bullets
from unlanded.report.sources import sources_part


def said(investigation: Investigation) -> tuple[str, ...]:
    return next(b for b in sources_part(investigation).blocks if isinstance(b, Bullets)).items


def test_every_source_stands_once_with_what_came_from_it(
    sites: tuple[Investigation, ...]
) -> None:
    for site in sites:
        lines = said(site)
        sources = [line.rpartition(": ")[2] for line in lines]
        assert len(set(sources)) == len(sources)
        for tool in site.instruments:
            assert any(tool.name.lower() in line.lower() and str(tool.source) in line
                       for line in lines)


def test_tern_quays_values(quay: Investigation) -> None:
    lines = said(quay)
    assert "2.5 mm² flexible, area and resistance: IEC 60228, class 5." in lines
    assert "Thickness of the covers of H05VV: IEC 60227-5 [from memory]." in lines
    assert any("multipoles" in line and "1975" in line for line in lines)


def test_a_wire_in_gauges_is_from_its_own_standard(mill: Investigation) -> None:
    assert any(line.startswith("14 AWG flexible, area and resistance: ASTM B258")
               for line in said(mill))
