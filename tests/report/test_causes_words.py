"""Readings in words."""

from __future__ import annotations

from example_causes import seen
from unlanded.reference.instruments import INSTRUMENTS
from unlanded.report.causes_words import candidate_words, reading_words
from unlanded.study.next_reading import Candidate
from unlanded.study.readings import Pair


def test_a_reading_and_a_measurement_in_a_few_words() -> None:
    reading = seen("digital-10M", "26.3 V", resistor=100e3,
                   actions=frozenset({"loads off", "neighbours off"}))
    assert reading_words(reading) == (
        "26.3 V, digital meter, 10 MΩ, spare to earth, far end, loads off, neighbours off and "
        "100 kΩ beside it")
    plain = Candidate(INSTRUMENTS["coil-tester"], Pair("spare@near"))
    assert candidate_words(plain) == "coil tester, spare to earth, near end"
