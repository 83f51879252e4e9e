"""The entry box and its handle, without a browser."""

from __future__ import annotations

import pytest

from unlanded.errors import Refused
from unlanded.panels.quantity import Quantity
from unlanded.panels.quantity_box import QuantityBox
from unlanded.units import si

LENGTH = Quantity("Run length", "m", 1.0, 1000.0)


class Taken(list[str]):
    """What was accepted; refuses what is shorter than 2 m."""

    def __call__(self, text: str) -> None:
        if si(text, "m") < 2:
            raise Refused("run.length", "must be at least 2 m", given=text)
        self.append(text)


@pytest.fixture
def taken() -> Taken:
    return Taken()


@pytest.fixture
def box(taken: Taken) -> QuantityBox:
    return QuantityBox(LENGTH, 85.0, taken)


def test_typed_feet_are_taken_exactly_and_echoed_in_metres(box: QuantityBox, taken: Taken) -> None:
    box.text.value = "150 ft"
    assert (taken, box.value, box.text.value) == (["150 ft"], 45.72, "45.72 m")
    nearest = LENGTH.grid()[box.slider.value]
    assert nearest == pytest.approx(45.72, rel=0.03, abs=0)


def test_the_handle_steps_through_round_values(box: QuantityBox, taken: Taken) -> None:
    box.slider.value += 1
    assert box.value == LENGTH.grid()[box.slider.value]
    assert box.text.value == taken[-1]
    assert len(taken) == 1


def test_a_shown_value_is_not_rounded_to_the_handle(box: QuantityBox, taken: Taken) -> None:
    box.show(85.123)
    assert (box.value, box.text.value, taken) == (85.123, "85.123 m", [])


@pytest.mark.parametrize(("text", "says"), [
    ("50 kg", "Run length: must be in m or a unit that converts to it; given 50 kg. Kept 85 m."),
    ("1,5 m", "two ways"), ("", "must begin with a number"), ("nan m", "Kept 85 m."),
    ("1 m", "run.length: must be at least 2 m; given 1 m. Kept 85 m."),
])  # fmt: skip
def test_refused_text_is_told_and_the_value_kept(
    box: QuantityBox, taken: Taken, text: str, says: str
) -> None:
    box.text.value = text
    assert says in box.message.value
    assert 'role="alert"' in box.message.value
    assert (box.value, taken) == (85.0, [])
    box.text.value = "85 m"
    assert box.message.value == ""


def test_beyond_the_handle_s_range_is_for_the_checks_to_say(box: QuantityBox, taken: Taken) -> None:
    box.text.value = "3 km"
    assert (box.value, taken[-1], box.slider.value) == (3000.0, "3 km", box.slider.max)


def test_other_units_and_another_range(box: QuantityBox, taken: Taken) -> None:
    box.fit(LENGTH, 45.72, customary=True)
    assert (box.text.value, taken) == ("150 ft", [])
    box.fit(Quantity("Gap to the surface", "m", 1e-3, 0.1), 0.00508, customary=True)
    assert (box.text.description, box.text.value) == ("Gap to the surface", "0.2 in")
    assert taken == []
    assert box.text.tooltip.startswith("Gap to the surface, with its unit")


def test_every_control_has_a_name(box: QuantityBox) -> None:
    assert box.text.description == "Run length"
    assert box.slider.tooltip.startswith("Run length")
