"""What the conductors of a case are made of, by name, and the sources of those values."""

from __future__ import annotations

from collections.abc import Iterator

from ..case.cable import BARE, AnyCable, Wire
from ..reference.insulation import COVERS, MATERIALS
from ..reference.records import Source
from ..reference.sizes import COPPER_RESISTIVITY, Size

MIL = 25.4e-6  # metres


def core_wires(cable: AnyCable) -> dict[str, Wire]:
    """Metal and cover of each conductor that has a trade size; none for those drawn freely."""
    match cable.layout:
        case "free":
            return {}
        case "singles" | "in conduit":
            return {name: cable.wire(name) for name in cable.cores}
        case "flat twin and earth":
            return dict.fromkeys((cable.cores[0], cable.cores[2]), cable)
        case _:
            return dict.fromkeys(cable.cores, cable)


def core_sizes(cable: AnyCable) -> dict[str, Size]:
    """The trade size of each conductor that has one."""
    sizes = {name: wire.conductor for name, wire in core_wires(cable).items()}
    if cable.layout == "flat twin and earth":
        sizes[cable.cores[1]] = cable.earth_conductor
    return sizes


def permittivity_words(cable: AnyCable, *, customary: bool = False) -> tuple[str, ...]:
    """Each kind of cover with its relative permittivity, its range and where it comes from."""
    if cable.layout == "free":
        wires = {c.name: c.permittivity for c in cable.conductors if c.permittivity}
        return tuple(f"The cover of {name}: relative permittivity {limits.likely:g} "
                     f"({limits.at('low'):g} to {limits.at('high'):g}), as the case states."
                     for name, limits in wires.items())
    return tuple(dict.fromkeys(_cover_words(w, customary) for w in core_wires(cable).values()
                               if w.insulation not in (None, BARE)))


def _cover_words(wire: Wire, customary: bool) -> str:
    likely, low, high = (wire.cover_permittivity(k) for k in ("likely", "low", "high"))
    origin = ("as the case states" if wire.permittivity is not None
              else str(MATERIALS[str(wire.insulation)].permittivity.source))
    thick = f"{wire.cover / MIL:.3g} mil" if customary else f"{wire.cover * 1e3:.3g} mm"
    return (f"Covers of {wire.insulation}, {thick} thick: relative permittivity "
            f"{likely:g} ({low:g} to {high:g}), {origin}.")


def core_sources(cable: AnyCable) -> Iterator[tuple[str, Source]]:
    """What each value of the conductors is, and its source; repeats included."""
    if cable.layout == "free":
        if any(c.resistance is None for c in cable.conductors):
            yield "resistivity of copper", COPPER_RESISTIVITY.source
        return
    for size in core_sizes(cable).values():
        yield f"{size.name} {size.stranding}, area and resistance", size.source
        yield f"{size.name} {size.stranding}, diameter", size.radius_source
    for wire in core_wires(cable).values():
        if wire.insulation in (None, BARE):
            continue
        if wire.permittivity is None:
            yield f"permittivity of {wire.insulation}", MATERIALS[
                str(wire.insulation)].permittivity.source
        if wire.type and "thickness" not in wire.model_fields_set:
            yield f"thickness of the covers of {wire.type}", COVERS[wire.type].source
