"""The text of a file on disk, as plain data where it is TOML, and the way back from a fault to its line.

The text is untrusted: size, depth and what would take too long are refused before anything looks at it, and
numbers with a point or an exponent keep their text, so that no float stands between file and exact number.
"""

from __future__ import annotations

import os
import re
import tomllib
from collections import Counter
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any, Final

from trusscalc.errors import FileFormatError

LARGEST_FILE: Final = 2_000_000
"""Bytes; a truss of 40,000 members fits."""
MOST_PROBLEMS: Final = 100
LONGEST_PROBLEM: Final = 400
DEEPEST_DATA: Final = 8

_QUOTED: Final = r'"(?:\\.|[^"\\\n])*"|\'[^\'\n]*\''
_KEY: Final = rf"[A-Za-z0-9_-]+|{_QUOTED}"
_KEYS: Final = re.compile(_KEY)
_STRINGS: Final = re.compile(_QUOTED)
_STRING_OR_COMMENT: Final = re.compile(rf"{_QUOTED}|#.*")
_HEADER: Final = re.compile(rf"\s*\[\s*((?:{_KEY})(?:\s*\.\s*(?:{_KEY}))*)\s*\]")
_REPEATED: Final = re.compile(rf"\s*\[\[\s*((?:{_KEY})(?:\s*\.\s*(?:{_KEY}))*)\s*\]\]")
_ENTRY: Final = re.compile(rf"\s*({_KEY})\s*=")
_LONG_DOTTED_KEY: Final = re.compile(rf"(?<![\w\"'-])(?:(?:{_KEY})[ \t]*\.[ \t]*){{16}}")


class DecimalText(str):
    """A number with a point or an exponent, as it stands in the file."""

    __slots__ = ()


def text_of(path: str | os.PathLike[str]) -> str:
    """Return the text of a file on disk, without a byte-order mark and never more than ``LARGEST_FILE`` and a little.

    Raises
    ------
    FileFormatError
        When it is no ordinary file, cannot be read or is not UTF-8.
    """
    try:
        return _content(Path(path)).decode("utf-8-sig")
    except UnicodeDecodeError as problem:
        line = problem.object.count(b"\n", 0, problem.start) + 1
        message = f"line {line}: is not UTF-8 text; save the file as UTF-8"
    except FileNotFoundError:
        message = "there is no such file; check the name and the folder"
    except (OSError, ValueError) as problem:
        message = f"cannot be read: {one_line(getattr(problem, 'strerror', None) or str(problem))}"
    raise FileFormatError(message, source=one_line(os.fspath(path)))


def _content(path: Path) -> bytes:
    if path.exists() and not path.is_file():
        message = "is not an ordinary file; name the file itself"
        raise ValueError(message)
    with path.open("rb") as file:
        return file.read(LARGEST_FILE + 1)


def data_of(text: str, source: str) -> dict[str, Any]:
    """Return the tables of a TOML text; numbers with a point or an exponent as DecimalText.

    Raises
    ------
    FileFormatError
        When it is no TOML, or larger or deeper than a truss file has reason to be.
    """
    text = text.removeprefix("\N{ZERO WIDTH NO-BREAK SPACE}")
    problem = _refusal(text)
    data: dict[str, Any] = {}
    try:
        if not problem:
            data = tomllib.loads(text, parse_float=lambda digits: DecimalText(digits.replace("_", "")))
    except tomllib.TOMLDecodeError as fault:
        problem = f"is no valid TOML: {fault}"
    except RecursionError:
        problem = "is nested too deep"
    except ValueError:  # from int() itself
        problem = "holds a whole number of too many digits"
    if _too_deep(data):
        problem = "is nested too deep"
    if problem:
        raise FileFormatError(one_line(problem), source=source)
    return data


def _refusal(text: str) -> str:
    try:
        if len(text) > LARGEST_FILE or len(text.encode()) > LARGEST_FILE:
            return f"too large: more than {LARGEST_FILE:,} bytes"
    except UnicodeEncodeError:
        return "holds half a surrogate pair, which is no character"
    if long_key := _LONG_DOTTED_KEY.search(text):  # reading one takes time that grows with its square
        return f"line {text.count(chr(10), 0, long_key.start()) + 1}: a key of so many parts does not belong here"
    return ""


def _too_deep(data: dict[str, Any]) -> bool:
    level: list[Any] = [data]
    for _ in range(DEEPEST_DATA):
        level = [
            inner
            for item in level
            for inner in (item.values() if isinstance(item, dict) else item)
            if isinstance(inner, (dict, list))
        ]
    return bool(level)


def faulty(problems: list[str], text: str, source: str) -> FileFormatError:
    """Return the error that tells all problems, each once, with its line where that is certain."""
    lines = _lines(text)
    found = sorted(
        ((_line_of(problem, lines), problem) for problem in dict.fromkeys(problems)), key=lambda pair: pair[0]
    )
    told = [f"line {line}: {problem}" if line else problem for line, problem in found]
    return FileFormatError(capped(told), source=source)


def capped(problems: Iterable[str]) -> list[str]:
    """Return the problems a reader can take in: each on one line, and not too many."""
    told = [one_line(problem) for problem in dict.fromkeys(problems)]
    return [*told[:MOST_PROBLEMS], *([f"and {more} more problems"] if (more := len(told) - MOST_PROBLEMS) > 0 else [])]


def _lines(text: str) -> dict[str, int]:
    """Return line numbers by the words a problem starts with: ``[table] key``, or with a name from its list.

    Only plain layouts are understood; whatever is unclear is left out.
    """
    if '"""' in text or "'''" in text:
        return {}
    found: dict[str, int] = {}
    head, start, depth = "", "", 0
    repeated: Counter[str] = Counter()
    for count, line in enumerate(text.split("\n"), 1):
        if not depth and (header := _HEADER.match(line)):
            parts = [_unquoted(key) for key in _KEYS.findall(header[1])]
            head, parent, last = f"[{'.'.join(parts)}]", ".".join(parts[:-1]), parts[-1]
            found.setdefault(head, count)
            found.setdefault(f"[{parent}] {last}" if parent else last, count)
            continue
        if not depth and (header := _REPEATED.match(line)):
            table = ".".join(_unquoted(key) for key in _KEYS.findall(header[1]))
            repeated[table] += 1
            head = f"[[{table}]] no. {repeated[table]}"
            found.setdefault(head, count)
            continue
        if not depth and (entry := _ENTRY.match(line)):
            key = _unquoted(entry[1])
            start = f"{head} {key}" if head else key
            found.setdefault(start, count)
            found.setdefault(f"{head} {key!r}", count)
            line = line[entry.end() :]  # noqa: PLW2901 - the rest of it
        for quoted in _STRINGS.findall(line):
            found.setdefault(f"{start} {_unquoted(quoted)!r}", count)
        bare = _STRING_OR_COMMENT.sub("", line)
        depth += sum(map(bare.count, "[{")) - sum(map(bare.count, "]}"))
    return found


def _unquoted(key: str) -> str:
    return key[1:-1] if key[0] in "\"'" else key


def _line_of(problem: str, lines: Mapping[str, int]) -> int:
    """Return the line found for the longest beginning of a problem, or 0."""
    for end in range(min(len(problem), LONGEST_PROBLEM) - 1, 0, -1):
        if problem[end] in ": " and problem[:end] in lines:
            return lines[problem[:end]]
    return 0


def one_line(text: str) -> str:
    """Return text that stays on one line of a terminal: what does not print is escaped, and it is cut when too long."""
    shown = "".join(
        character if character.isprintable() else f"\\u{{{ord(character):04x}}}" for character in text[:LONGEST_PROBLEM]
    )
    return shown if len(text) <= LONGEST_PROBLEM else f"{shown}..."
