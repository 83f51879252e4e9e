"""Reading a case file: the text, its fingerprint, its values, and every mistake in it."""

from __future__ import annotations

import hashlib
import re
import tomllib
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from ..errors import Mistake, Refused, nearest
from ..study.reduced import NO_SUSPECT, may_be_suspect
from ..study.spread import limits
from ..units import show
from .places import Place, line_numbers
from .runs import end_mistakes, run_of
from .schema import CaseFile, RunTable
from .sections import dimension, resized, section_of
from .validation import Found, Index, printable, validate, validate_run

LARGEST = 1024 * 1024
DEEPEST = 16
_TOO_DEEP = "has lists or tables nested too deep: a case needs no more than a few"
_BOM = "\ufeff"
# A reader of TOML takes a time that grows with the square of a key's parts.
_LONG_KEY = re.compile(r"""(?<![\w"'.-])(?:[\w"'-]+[ \t]*\.[ \t]*){16}""")
_METRES = re.compile(r"(\d+(?:\.\d+)?(?:e-?\d+)?) m\b")
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
        utf16 = "the editor saved UTF-16: " if data[:2] in (b"\xff\xfe", b"\xfe\xff") else ""
        raise Refused(f"{path.name} line {line}", "is not UTF-8 text",
                      given=f"byte {data[error.start]:02X} (hexadecimal)",
                      hint=f"{utf16}save the file as UTF-8") from None
    return _plain_line_ends(text), "\r\n" if "\r\n" in text else "\n"


def parse(text: str, name: str) -> dict[str, Any]:
    """The plain values of a TOML text; refused with the line where it is not TOML."""
    if not re.search(r"^[ \t]*[^#\s]", text.replace("\r", "\n"), re.MULTILINE):
        raise Refused(name, "is empty", hint="a case has at least title, [supply] and [run]")
    if "\r" in text:
        line = text.count("\n", 0, text.index("\r")) + 1
        raise Refused(f"{name} line {line}", "has a carriage return that ends no line",
                      hint="save the file with the usual line ends")
    if long := _LONG_KEY.search(text):
        line = text.count("\n", 0, long.start()) + 1
        raise Refused(f"{name} line {line}", "a key may have 16 parts", given=long.group())
    try:
        plain = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise _not_toml(str(error), text, name) from None
    except RecursionError:
        raise Refused(name, _TOO_DEEP) from None
    except ValueError:
        raise Refused(name, "has a number of thousands of digits") from None
    if _depth(plain) > DEEPEST:
        raise Refused(name, _TOO_DEEP)
    return plain


def _depth(value: Any) -> int:
    inner = value.values() if isinstance(value, dict) else value if isinstance(value, list) else ()
    return 1 + max(map(_depth, inner), default=0)


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
    except Refused:
        raise
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
    hint = nearest(path.name, names)
    return hint if hint.startswith("did you mean") else ""


def _not_toml(message: str, text: str, name: str) -> Refused:
    match = _LINE_IN_MESSAGE.search(message)
    line = int(match[1]) if match and match[1] else text.rstrip("\n").count("\n") + 1
    said = _LINE_IN_MESSAGE.sub("", message)
    rule, hint = next((words for start, words in _TOML_RULES.items() if said.startswith(start)),
                      (f"{said[:1].lower()}{said[1:]}", ""))
    return Refused(f"{name} line {line}", f"is not TOML: {rule}",
                   given=printable(text.split("\n")[line - 1].strip()), hint=hint)


_QUOTES = 'text and quantities stand in quotes, for example length = "85 m"'
_LINE = "a line is key = value, [table], or # remark; keys beyond a to z and 0 to 9 are in quotes"
# What the reader of TOML says -> what it means to whoever wrote the file, and a hint.
_TOML_RULES = {
    "Illegal character '\\n'": ("a quotation mark is not closed on its line", ""),
    "Illegal character": ("has a control character", "type the line again"),
    "Expected newline or end of document": ("there is more on the line after the value", _QUOTES),
    "Invalid value": ("the value cannot be read", _QUOTES),
    "Found invalid character": ("a quotation mark is not closed on its line", ""),
    'Expected "\'"': ("a quotation mark is not closed on its line", ""),
    "Expected '='": ("a key is not followed by = and its value", _LINE),
    "Invalid statement": ("the line cannot be read", _LINE),
    "Invalid initial character for a key": ("the key cannot be read", _LINE),
    "Expected ']' at the end of a table": ("the header is not closed with ]", _LINE),
    "Expected ']]' at the end of an array": ("the header is not closed with ]]", _LINE),
    "Cannot overwrite": ("this is set already above", "each key and [table] may be there once"),
    "Cannot declare": ("this table is there already above", "each [table] may be there once"),
    "Cannot mutate": ("this adds to a table or list that is closed already above", ""),
    "Duplicate inline table key": ("a key is given twice between { and }", ""),
    "Unclosed array": ("a list is not closed with ], or lacks a comma", ""),
    "Unclosed inline table": ("a table in { } is not closed on its line, or lacks a comma", ""),
    "Unterminated string": ("a quotation mark is not closed", ""),
    "Unescaped '\\' in a string": ("a backslash in double quotes begins an escape",
                                  "write \\\\, or use single quotes"),
    "Invalid hex value": ("\\u is followed by four digits of a hexadecimal number", ""),
}


def _read(text: str, name: str) -> tuple[CaseFile | None, list[Mistake]]:
    plain = parse(text, name)
    index = Index(name, line_numbers(text))
    content, found = validate(plain)
    run = content.run if content else validate_run(plain)
    if run is not None:
        found += _geometry(run)
    if content is not None and not found:
        found += _sizes(content)
    if content is not None and not found:
        found += _ends(content)
    found.sort(key=lambda f: index.line(f[0]))
    mistakes = [index.told(f) for f in found]
    return (None if mistakes else content), mistakes


def _geometry(run: RunTable) -> list[Found]:
    """What the section itself refuses, at the cable, or at the conductor that lies wrong."""
    try:
        section_of(run)
    except Refused as refusal:
        return [(_where(m, run), replace(m, place="", rule=_prefixed(f"{m.place}: {m.rule}"),
                                         given=_prefixed(m.given)))
                for m in refusal.mistakes]
    return []


# What leaves the least room of each dimension that may vary: its lower or its upper limit.
_TIGHTEST = {"thickness": 1, "spacing": 0, "bore": 0, "gap": 1}


def _sizes(content: CaseFile) -> list[Found]:
    """Whether the section can still be made where its dimensions leave the least room."""
    varied = content.spread.geometry
    tight = {key: limits(spread.over(dimension(content.run, key)))[_TIGHTEST[key]]
             for key, spread in varied.items()}
    try:
        section_of(resized(content.run, tight))
    except Refused as refusal:
        m = refusal.mistakes[0]
        rule = f"allows sizes that do not fit: {_prefixed(f'{m.place}: {m.rule}')}"
        place = ("spread", *varied) if len(varied) == 1 else ("spread",)
        return [(place, Mistake("", rule, _prefixed(m.given)))]
    return []


def _prefixed(text: str) -> str:
    """Lengths as an engineer reads them: "0.003 m" becomes "3 mm"."""
    return _METRES.sub(lambda m: show(float(m[1]), "m", 6), text)


def _where(mistake: Mistake, run: RunTable) -> Place:
    named = re.findall(r'"([^"]+)"', mistake.place)
    if run.cable.layout == "free" and named:
        return ("run", "cable", "conductors", run.cable.names.index(named[-1]))
    outside = run.surround is not None and "must lie" in mistake.rule
    return ("run", "surround") if outside else ("run", "cable")


def _ends(content: CaseFile) -> list[Found]:
    """What the run refuses of its two ends, and readings between points that are one."""
    try:
        run = run_of(content)
        mistakes = tuple(end_mistakes(run))
    except Refused as refusal:
        mistakes = refusal.mistakes
    if mistakes:
        return [(_end_place(m), m) for m in mistakes]
    named: list[tuple[Place, Any]] = [
        (("readings", count, "to"), r) for count, r in enumerate(content.readings)]
    named += [(("memo", "added", count, "to"), added) for count, added in
              enumerate(content.memo.added) if added.b is not None]
    named += [(("operation", count, "to"), o) for count, o in enumerate(content.operation)
              if o.b is not None]
    found = [(place, Mistake("", "is the same point as from, as the ends are described: "
                             "nothing can be between them", entry.b))
             for place, entry in named if run.same(entry.a, entry.b)]
    return found + [(("causes", "suspects", count), Mistake("", NO_SUSPECT, name))
                    for count, name in enumerate(content.causes.suspects)
                    if not may_be_suspect(run, name)]


def _end_place(mistake: Mistake) -> Place:
    match = re.search(r'"([^"@]+)@(near|far)"', mistake.place)
    return ("run", "ends", match[2], match[1]) if match else ("run",)
