"""Reading a case file: what is no case at all, fingerprints, and every mistake at once."""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

import pytest

from case_text import NAMES, SITES, changed, refusals, site
from unlanded.case.loading import DEEPEST, LARGEST, check_case, load_case, read_case, read_text
from unlanded.errors import Refused

QUAY = site("tern-quay")
DATA = (SITES / "tern-quay.toml").read_bytes()


def checked(path: str | Path) -> str:
    (mistake,) = check_case(path)
    return str(mistake)


def file(folder: Path, data: bytes) -> Path:
    path = folder / "case.toml"
    path.write_bytes(data)
    return path


@pytest.mark.parametrize("name", NAMES)
def test_check_finds_nothing_in_a_demo_site(name: str) -> None:
    assert check_case(SITES / f"{name}.toml") == ()


def test_all_mistakes_come_at_once_in_the_order_of_lines() -> None:
    said = refusals(changed(
        QUAY, ('"230 V"', '"230"'), ('"50 Hz"', '"50 m"'), ("length =", "lenght ="),
        ('brown = "L"', 'bron = "L"'), ('"two-pole"]', '"two-pol"]'),
        ("[device]", '[run.surround]\nkind = "plane"\ngap = "-1 mm"\n[device]'),
        ('from = "black@far"', 'from = "blck@far"'),
    ))
    lines = [int(s.split(" line ")[1].split(",")[0]) for s in said]
    assert lines == sorted(lines)
    paths = [s.split(", ", 1)[1].split(": ")[0] for s in said]
    assert paths == ["supply.voltage", "supply.frequency", "run.length", "run.lenght",
                     "run.ends.near.bron", "sheet.instruments[6]", "run.surround.gap",
                     "readings[1].from"]


def test_an_overlap_is_told_beside_other_mistakes() -> None:
    apart = ('"laid up"', '"singles"\nspacing = "1 mm"')
    said = refusals(changed(QUAY, ('"50 Hz"', '"50"'), apart))
    assert len(said) == 7  # the frequency, and each two of four singles
    assert sum("overlap" in s for s in said) == 6


@pytest.mark.parametrize(("data", "says"), [
    (b"", "case.toml: is empty. (a case has at least title, [supply] and [run])"),
    (b"# only a remark\n\n", "case.toml: is empty. (a case has at least title, [supply] and"),
    (b"\xef\xbb\xbf", "case.toml: is empty."),
    (b'title = "x"\nsite = "\xff"', "case.toml line 2: is not UTF-8 text; given byte FF "
     "(hexadecimal). (save the file as UTF-8)"),
    ("title".encode("utf-16"), "(the editor saved UTF-16: save the file as UTF-8)"),
    (b"#" * (LARGEST + 1), "case.toml: is larger than 1 MiB, and a case is a page or two of text."),
    (b'title = "x"\rsite = "y"', "case.toml line 1: has a carriage return that ends no line."),
    (b"\0" * 9, "case.toml line 1: is not TOML: the line cannot be read; given ���������."),
])  # fmt: skip
def test_a_file_that_is_no_text_is_refused(data: bytes, says: str, tmp_path: Path) -> None:
    assert says in checked(file(tmp_path, data))


def test_a_file_of_the_largest_size_is_read(tmp_path: Path) -> None:
    assert check_case(file(tmp_path, DATA + b"#" * (LARGEST - len(DATA)))) == ()


def test_what_is_no_file_is_refused(tmp_path: Path) -> None:
    assert checked(tmp_path).endswith(
        "is a folder, and a case is one TOML file. (it holds no case file)")
    file(tmp_path, DATA)
    assert checked(tmp_path).endswith("(it holds case.toml)")
    assert checked(tmp_path / "caes.toml").endswith(
        'there is no such file. (did you mean "case.toml"?)')
    assert "cannot be read" in checked("a\0b")
    assert "cannot be read" in checked(tmp_path / ("x" * 300))
    assert "cannot be read" in checked(tmp_path / "case.toml" / "x") or os.name == "nt"


def test_a_device_is_not_read() -> None:
    assert checked(os.devnull).endswith("is not a plain file.")


@pytest.mark.parametrize(("text", "says"), [
    ("hello", "line 1: is not TOML: a key is not followed by = and its value; given hello."),
    ("title = Evaporator fan", "line 1: is not TOML: the value cannot be read; given title = Evap"),
    ('a = 1\ntitle = "x\n', 'line 2: is not TOML: a quotation mark is not closed on its line;'),
    ("title = 'x\n", "line 1: is not TOML: a quotation mark is not closed on its line; given"),
    ('notes = """x\n', "line 1: is not TOML: a quotation mark is not closed; given notes"),
    ("[run\n", "line 1: is not TOML: the header is not closed with ]; given [run."),
    ("a = [1\nb = 2", "line 2: is not TOML: a list is not closed with ], or lacks a comma;"),
    ("a = {b = 1\nc = 2", "line 1: is not TOML: a table in { } is not closed on its line, or"),
    ('a = "b" c', "line 1: is not TOML: there is more on the line after the value; given a"),
    ("a = 1\na = 2", "line 2: is not TOML: this is set already above; given a = 2."),
    ("[a]\n[a]", "line 2: is not TOML: this table is there already above; given [a]."),
    ("a = {b = 1, b = 2}", "line 1: is not TOML: a key is given twice between { and }; given"),
    ("länge = 1", "line 1: is not TOML: a key is not followed by = and its value; given lä"),
    ('a = "\\x"', "line 1: is not TOML: a backslash in double quotes begins an escape; given"),
    ('a = "\\u12"', "line 1: is not TOML: \\u is followed by four digits of a hexadecimal number"),
    ('a = "x\0y"', 'line 1: is not TOML: has a control character; given a = "x�y".'),
    ("a = " + "9" * 5000, "has a number of thousands of digits."),
    (".".join("a" * 5000) + " = 1", "line 1: a key may have 16 parts; given a.a.a"),
    ("a = " + "[" * 5000 + "]" * 5000, "has lists or tables nested too deep"),
    ("a = " + "{a = " * 3000 + "1" + "}" * 3000, "has lists or tables nested too deep"),
    ("a = " + "[" * DEEPEST + "]" * DEEPEST, "has lists or tables nested too deep"),
])  # fmt: skip
def test_a_text_that_is_not_toml_is_one_sentence(text: str, says: str) -> None:
    (said,) = refusals(text)
    assert said.startswith("c.toml")
    assert says in said
    assert said.isprintable()
    assert len(said) < 400


@pytest.mark.parametrize("depth", [DEEPEST - 2, 200, 320, 330, 331, 332, 333, 490, 495, 1000])
def test_no_depth_of_nesting_is_a_traceback(depth: int) -> None:
    assert refusals("title = " + "[" * depth + "]" * depth)
    assert refusals("title = " + "{a = " * depth + "1" + "}" * depth)


def test_the_fingerprint_is_of_the_text_whatever_its_line_ends(tmp_path: Path) -> None:
    here = load_case(SITES / "tern-quay.toml")
    for data in (DATA.replace(b"\n", b"\r\n"), b"\xef\xbb\xbf" + DATA):
        assert load_case(file(tmp_path, data)).fingerprint == here.fingerprint
    assert load_case(file(tmp_path, DATA + b"#")).fingerprint != here.fingerprint
    assert here.fingerprint == hashlib.sha256(DATA).hexdigest()
    assert here.fingerprint.startswith(here.short_fingerprint)
    assert len(here.short_fingerprint) == 12


def test_line_ends_are_known(tmp_path: Path) -> None:
    assert read_text(file(tmp_path, b"a\r\nb")) == ("a\nb", "\r\n")
    assert read_text(file(tmp_path, b"a\nb")) == ("a\nb", "\n")


def test_a_refusal_names_the_file_and_carries_every_mistake() -> None:
    with pytest.raises(Refused) as caught:
        read_case(changed(QUAY, ('"230 V"', "230"), ('"50 Hz"', "50")), "mine.toml")
    assert [m.place.split(",")[0] for m in caught.value.mistakes] == ["mine.toml line 13",
                                                                     "mine.toml line 14"]
