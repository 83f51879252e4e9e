"""What the memo takes for granted, said so that a reader can disagree with it."""

from __future__ import annotations

from collections.abc import Iterator

from ..case.cable import AnyCable
from ..errors import listed
from ..physics.section import Pipe, Plane
from ..units import show
from .cores import permittivity_words
from .investigation import Investigation
from .memo import Bullets, Paragraph, Part
from .words import capital, percent, screen_words


def assumptions_part(investigation: Investigation) -> Part:
    """What was taken for granted, one sentence a line."""
    lines = (*_supply(investigation), *_cable(investigation), *_run(investigation),
             *_readings(investigation))
    return Part("Assumptions", (
        Paragraph("The numbers hold as far as these do. Where the circuit differs, change the case "
                  "and make the memo again."),
        Bullets(lines)))


def _supply(investigation: Investigation) -> Iterator[str]:
    supply = investigation.run.supply
    stated = ("taken as stated: its own tolerance is not in the ranges"
              if investigation.uncertain.supply is None else "with the limits given below")
    yield (f"The supply is a steady sine of {show(supply.voltage, 'V')} line to neutral at "
           f"{show(supply.frequency, 'Hz')}, {stated}.")
    yield ("The neutral is bonded to earth at the source, and nowhere else unless an end says so. "
           "Earth is one point, the grounding system, without impedance of its own at the ends.")


def _cable(investigation: Investigation) -> Iterator[str]:
    cable = investigation.case.content.run.cable
    yield from permittivity_words(cable, customary=investigation.customary)
    yield ("The insulation is sound and dry: it has no leakage, and its dielectric loss is left "
           "out.")
    yield from _layout(cable)
    filler = cable.filler_permittivity
    yield ("Air lies between the covers." if filler == 1 else
           f"What lies between the covers has relative permittivity {filler:g}.")
    if investigation.run.screen:
        yield from _screen(investigation)
    elif isinstance(investigation.run.section.surround, Pipe | Plane):
        yield "The metal around or under the run is earthed all along it, at 0 V."
    else:
        yield ("No earthed metal lies near the run; a tray, wall or conduit would lower the "
               "voltages of open conductors.")


def _screen(investigation: Investigation) -> Iterator[str]:
    run, written = investigation.run, investigation.case.content.run.screen
    assert run.screen is not None
    assert written is not None
    usual = "" if "resistance" in written.model_fields_set else ", a usual value"
    yield (f"The screen is {screen_words(run)}. It closes round the cores without gaps, and has "
           f"{show(run.screen.resistance * 1e3, 'Ω')}/km{usual}. A current along it is taken as "
           "spread evenly round it.")
    if written.earthed == "none":
        given = "to_earth" in written.model_fields_set
        yield (f"The outside of the screen has {show(run.screen.to_earth, 'F/m')} to earth"
               f"{'' if given else ', which depends on what the cable lies on: a judgement'}. "
               "The screen touches no earthed metal on its way.")
    elif written.earthed != "both":
        yield ("Earthed at one end, the screen keeps electric fields out and takes nothing off "
               "what is induced magnetically.")


def _layout(cable: AnyCable) -> Iterator[str]:
    match cable.layout:
        case "laid up" | "control" | "flat twin and earth":
            yield ("The dielectric of a common sheath is not modelled; it raises the capacitances "
                   "a little. The section is the same all along the cable.")
        case "in conduit":
            yield ("The conductors lie in the conduit at random; what is expected is for one "
                   f"arrangement of many, seed {cable.seed}, the same all along the run. The "
                   "ranges are over many arrangements, unless the case says otherwise.")
        case _:
            yield "The conductors keep their places all along the run."


def _run(investigation: Investigation) -> Iterator[str]:
    run = investigation.run
    yield "Resistances are those of the conductors at 20 °C, without skin effect."
    yield (f"What returns by earth does so through soil of {run.earth_resistivity:g} Ω·m; of "
           "little effect on the readings.")
    yield "A conductor that the case does not name at an end is open there."
    yield "Magnetic coupling from other circuits than this run is left out."


def _readings(investigation: Investigation) -> Iterator[str]:
    unsure = [i.name for i in investigation.uncertain.inputs]
    held = percent(investigation.spread.spread.coverage)
    yield (f"A range holds {held} of the draws of what is not known: "
           f"{listed([*unsure, 'the impedance and the accuracy of each instrument'])}. All "
           "else is taken as stated.")
    if any(t.source.title.startswith("typical of the class") for t in investigation.instruments):
        yield ("Instruments are typical of their class. Where the one in hand differs, describe it "
               "in the case from its data sheet.")
    for tool in investigation.instruments:
        if tool.note:
            yield f"{capital(tool.name)}: {tool.note}."
