"""What a case says of the causes, refused where it cannot be."""

from __future__ import annotations

import pytest

from case_text import SITES
from unlanded.case.loading import read_case
from unlanded.errors import Refused

QUAY = (SITES / "tern-quay.toml").read_text(encoding="utf-8")


def test_a_case_without_the_table_has_what_is_usual() -> None:
    causes = read_case(QUAY).content.causes
    assert causes.suspects == ()
    assert causes.shares == {}
    assert causes.section == "as described"


def test_the_table_and_the_keys_of_a_reading() -> None:
    text = QUAY + """
after = ["neighbours off", "loads off"]
resistor = "100 kohm"

[causes]
suspects = ["black"]
section = "not known"
shares = {"solid connection" = "30 %"}
costs = {"far end disconnected" = 5}
"""
    content = read_case(text).content
    assert content.readings[-1].after == ("neighbours off", "loads off")
    assert content.readings[-1].resistor == 100e3
    assert content.causes.suspects == ("black",)
    assert content.causes.shares == {"solid connection": 0.3}
    assert content.causes.costs == {"far end disconnected": 5.0}


@pytest.mark.parametrize(("added", "words"), [
    ('after = ["neighbour off"]', 'did you mean "neighbours off"'),
    ('resistor = "0 ohm"', "must be 1 Ω to 1 GΩ"),
    ('[causes]\nsuspects = ["purple"]', "is not a core of this case"),
    ('[causes]\nsuspects = ["black", "brown"]', r"suspects\[2\]: is fed or bonded at its ends"),
    ('[causes]\nshares = {"solid conection" = 0.1}', 'did you mean "solid connection"'),
    ('[causes]\nshares = {"solid connection" = 1.5}', "must be 0 to 1"),
    ('[causes]\nsection = "unknown"', "must be as described or not known"),
])
def test_what_cannot_be_is_refused(added: str, words: str) -> None:
    with pytest.raises(Refused, match=words):
        read_case(f"{QUAY}\n{added}\n")
