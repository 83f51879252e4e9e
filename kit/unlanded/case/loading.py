"""Reading a case file: the text, its fingerprint, its values, and every mistake in it."""

from __future__ import annotations

import hashlib
import re
import tomllib
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from ..errors import Mistake, Refused, nearest
from .places import Place, line_numbers
from .schema import CaseFile, RunTable
from .sections import section_of
from .validation import Found, Index, validate, validate_run

LARGEST = 1024 * 1024
_BOM = "\ufeff"
# A reader of TOML takes a time that grows with the square of a key's parts.
_LONG_KEY = re.compile(r"""(?<![\w"'.-])(?:[\w"'-]+[ \t]*\.[ \t]*){16}""")
_LINE_IN_MESSAGE = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")


@dataclass(frozen=True)
class Case:
    """A case that was read and is valid.

    Parameters
    ----------
    text : of the file, without byte order mark and with plain line ends
    content : its values, by table, in base SI
    name : what messages call it
    path : where it was read, None for one that never was a file
    line_end : how the file ends its lines, which saving keeps
    """

    text: str
    content: CaseFile
    name: str
    path: Path | None = None
    line_end: str = field(default="\n", compare=False)

    @property
    def fingerprint(self) -> str:
        """SHA-256 of the text in hexadecimal; line ends and a byte order mark do not count."""
        return hashlib.sha256(self.text.encode()).hexdigest()

    @property
    def short_fingerprint(self) -> str:
        """The first 12 digits of it, as a memo prints them."""
        return self.fingerprint[:12]


def load_case(path: str | Path) -> Case:
    """The case in the file at `path`; refused with every mistake found."""
    path = Path(path)
    text, line_end = read_text(path)
    return replace(read_case(text, path.name), path=path, line_end=line_end)


def read_case(text: str, name: str = "case") -> Case:
    """The case that `text` holds; `name` stands for the file in messages. Refused as a whole."""
    text = _plain_line_ends(text)
    content, mistakes = _read(text, name)
    if content is None:
        raise Refused.all_of(mistakes)
    return Case(text, content, name)


def check_case(path: str | Path) -> tuple[Mistake, ...]:
    """Every mistake in the file at `path`, in the order of its lines; none for a valid case."""
    try:
        load_case(path)
    except Refused as refusal:
        return refusal.mistakes
    return ()


def read_text(path: Path) -> tuple[str, str]:
    """The text of a file with plain line ends, and the line end that it uses."""
    data = _read_bytes(path)
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        hint = "the editor saved UTF-16" if data[:2] in (b"\xff\xfe", b"\xfe\xff") else ""
        raise Refused(f"{path.name} line {line}", "is not UTF-8 text",
                      given=f"byte 0x{data[error.start]:02X}",
                      hint=hint or "save the file as UTF-8") from None
    return _plain_line_ends(text), "\r\n" if "\r\n" in text else "\n"


def parse(text: str, name: str) -> dict[str, Any]:
    """The plain values of a TOML text; refused with the line where it is not TOML."""
    if not re.search(r"^[ \t]*[^#\s]", text, re.MULTILINE):
        raise Refused(name, "is empty", hint="a case has at least title, [supply] and [run]")
    if long := _LONG_KEY.search(text):
        line = text.count("\n", 0, long.start()) + 1
        raise Refused(f"{name} line {line}", "a key may have 16 parts", given=long.group())
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise _not_toml(str(error), text, name) from None
    except RecursionError:
        raise Refused(name, "is not TOML that can be read", given="lists nested too deep") from None
    except ValueError:
        raise Refused(name, "is not TOML that can be read",
                      given="a number of thousands of digits") from None


def _plain_line_ends(text: str) -> str:
    return text.removeprefix(_BOM).replace("\r\n", "\n")


def _read_bytes(path: Path) -> bytes:
    try:
        if path.is_dir():
            raise Refused(str(path), "is a folder, and a case is one TOML file",
                          hint=_cases_in(path))
        if path.exists() and not path.is_file():
            raise Refused(str(path), "is not a plain file")
        with path.open("rb") as file:
            data = file.read(LARGEST + 1)
    except FileNotFoundError:
        raise Refused(str(path), "there is no such file", hint=_near_file(path)) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refused(str(path), "cannot be read", given=reason) from None
    if len(data) > LARGEST:
        raise Refused(path.name, "is larger than 1 MiB, and a case is a page or two of text")
    return data


def _cases_in(folder: Path) -> str:
    names = sorted(p.name for p in folder.glob("*.toml"))[:5]
    return f"it holds {', '.join(names)}" if names else "it holds no case file"


def _near_file(path: Path) -> str:
    try:
        names = [p.name for p in path.parent.glob("*.toml")]
    except OSError:
        return ""
    hint = nearest(path.name, names) if names else ""
    return hint if hint.startswith("did you mean") else ""


def _not_toml(message: str, text: str, name: str) -> Refused:
    match = _LINE_IN_MESSAGE.search(message)
    line = int(match[1]) if match and match[1] else text.rstrip("\n").count("\n") + 1
    rule = _LINE_IN_MESSAGE.sub("", message)
    hint = next((h for start, h in _TOML_HINTS.items() if rule.startswith(start)), "")
    written = text.split("\n")[line - 1].strip() if match and match[1] else ""
    return Refused(f"{name} line {line}", f"is not TOML: {rule[:1].lower()}{rule[1:]}",
                   given=written, hint=hint)


_QUOTES = 'text and quantities stand in quotes, for example length = "85 m"'
_TOML_HINTS = {
    "Expected newline or end of document": _QUOTES,
    "Invalid value": _QUOTES,
    "Expected '='": 'keys with spaces or letters beyond a to z stand in quotes',
    "Cannot overwrite": "the same key is already set above",
    "Cannot declare": "the same table is already there above",
    "Invalid statement": 'a line is key = value, [table], or a comment that begins with #',
    "Unclosed": "a bracket or quotation mark is not closed",
    "Unterminated": "a bracket or quotation mark is not closed",
}


def _read(text: str, name: str) -> tuple[CaseFile | None, list[Mistake]]:
    plain = parse(text, name)
    index = Index(name, line_numbers(text))
    content, found = validate(plain)
    run = content.run if content else validate_run(plain)
    if run is not None:
        found += _geometry(run)
    found.sort(key=lambda f: index.line(f[0]))
    mistakes = [replace(m, place=index.at(place)) for place, m in found]
    return (None if mistakes else content), mistakes


def _geometry(run: RunTable) -> list[Found]:
    """What the section itself refuses, at the cable, or at the conductor that lies wrong."""
    try:
        section_of(run)
    except Refused as refusal:
        return [(_where(m, run), replace(m, rule=f"{m.place}: {m.rule}"))
                for m in refusal.mistakes]
    return []


def _where(mistake: Mistake, run: RunTable) -> Place:
    named = re.findall(r'"([^"]+)"', mistake.place)
    if run.cable.layout == "free" and named:
        return ("run", "cable", "conductors", run.cable.names.index(named[-1]))
    return ("run", "surround") if "screen" in mistake.place else ("run", "cable")
