"""From a TOML file to a checked scenario: every fault at once, each with its line."""

from __future__ import annotations

import difflib
import re
import tomllib
from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any, get_args

from pydantic import BaseModel, ValidationError
from pydantic.fields import FieldInfo

from collector.build.attached import attached
from collector.build.scenario import COMPANIONS, RIVALS, Scenario
from weather.errors import InputError, Problem

__all__ = ["read_scenario"]

Key = tuple[str | int, ...]
HEADER = re.compile(r"^\s*(\[\[?)\s*([^\]#]+?)\s*\]\]?\s*(?:#.*)?$")
ENTRY = re.compile(r"^\s*((?:[\w-]+|\"[^\"]*\")(?:\s*\.\s*(?:[\w-]+|\"[^\"]*\"))*)\s*=")


def read_scenario(path: Path, *, overrides: Sequence[str] = ()) -> Scenario:
    """Read, override and check a scenario.

    Parameters
    ----------
    path
        TOML file.
    overrides
        ``key.path=value``, the value written as in TOML; a bare word is text. A list's entry goes by its number, from 0:
        ``collector.cover.0.gap_mm=20``. Setting one of two keys that exclude each other takes the other out.

    Returns
    -------
    Scenario
        Checked.

    Raises
    ------
    InputError
        All faults together, in the file's order.
    """
    text = _text(path)
    try:
        given = tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        raise InputError(_toml_problem(fault, path=path)) from None
    lines = _lines(text)
    options = [_override(given, option=option, lines=lines) for option in overrides]
    try:
        return attached(
            Scenario.model_validate(given), where=_where(path, lines=lines, options=options), base=path.parent
        )
    except ValidationError as found:
        problems = [_problem(error, given=given, path=path, lines=lines, options=options) for error in found.errors()]
        unique = {str(problem): problem for _, problem in sorted(problems, key=lambda pair: pair[0])}
        raise InputError(list(unique.values())) from None


def _where(path: Path, *, lines: Mapping[Key, int], options: Sequence[Key]) -> Callable[[Key], str]:
    """File and line of a key, or the option that set it."""

    def where(key: Key) -> str:
        if any(key[: len(option)] == option for option in options):
            return "--set"
        return f"{path}:{line}" if (line := _line_of(key, lines=lines)) else str(path)

    return where


def _text(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8-sig")
    except OSError as fault:
        what, do = (
            f"scenario file cannot be read: {fault.strerror}",
            "check the path, or write a starter with `noonplate new`",
        )
        raise InputError(Problem(where=str(path), what=what, do=do)) from None
    except UnicodeDecodeError:
        raise InputError(
            Problem(where=str(path), what="scenario file is not UTF-8 text", allowed="a TOML file in UTF-8")
        ) from None


def _toml_problem(fault: tomllib.TOMLDecodeError, *, path: Path) -> Problem:
    said = str(fault)
    found = re.search(r"\(at line (\d+), column (\d+)\)", said)
    where = f"{path}:{found[1]}" if found else str(path)
    return Problem(
        where=where,
        what=f"not valid TOML: {said.partition(' (at')[0]}",
        do="text in quotes, decimals with a point, one key a line",
    )


def _lines(text: str) -> dict[Key, int]:
    """Line of each key and table, by its path; an array's tables counted from 0."""
    table: Key = ()
    counts: dict[Key, int] = {}
    found: dict[Key, int] = {}
    for number, line in enumerate(text.splitlines(), start=1):
        if header := HEADER.match(line):
            table = _indexed(_split(header[2]), counts=counts, new=header[1] == "[[")
            found.setdefault(table, number)
        elif entry := ENTRY.match(line):
            found.setdefault(table + _split(entry[1]), number)
    return found


def _split(dotted: str) -> Key:
    return tuple(part.strip().strip('"') for part in dotted.split("."))


def _indexed(path: Key, *, counts: dict[Key, int], new: bool) -> Key:
    """Path with the running number of each array of tables on it."""
    if new:
        counts[path] = counts.get(path, -1) + 1
    full: Key = ()
    for depth in range(1, len(path) + 1):
        full += (path[depth - 1],)
        if path[:depth] in counts:
            full += (counts[path[:depth]],)
    return full


def _override(given: dict[str, Any], *, option: str, lines: dict[Key, int]) -> Key:
    """Put one ``key.path=value`` into the file's content; returns the path."""
    dotted, equals, value = option.partition("=")
    if not equals or not dotted.strip():
        raise InputError(Problem(where="--set", what="not an override", got=repr(option), allowed="key.path=value"))
    path: Key = tuple(int(part) if part.isdigit() else part for part in _split(dotted) if isinstance(part, str))
    table: Any = given
    for part in path[:-1]:
        table = _step(table, part=part, option=option)
    last = path[-1]
    if isinstance(table, dict):
        _drop_rivals(table, key=str(last))
        table[str(last)] = _value(value.strip())
    elif isinstance(table, list) and isinstance(last, int) and last < len(table):
        table[last] = _value(value.strip())
    else:
        raise InputError(_no_such_place(option))
    lines.pop(path, None)
    return path


def _step(table: Any, *, part: str | int, option: str) -> Any:
    if isinstance(table, dict):
        return table.setdefault(str(part), {})
    if isinstance(table, list) and isinstance(part, int) and part < len(table):
        return table[part]
    raise InputError(_no_such_place(option))


def _no_such_place(option: str) -> Problem:
    do = "a list's entry goes by its number, from 0, and must exist: collector.cover.0.gap_mm=20"
    return Problem(where="--set", what="no such place in the scenario", got=repr(option), do=do)


def _drop_rivals(table: dict[str, Any], *, key: str) -> None:
    for sets in RIVALS.values():
        if any(key in keys for keys in sets) and not (key == "emittance" and "glass" in table):
            for other in (name for keys in sets if key not in keys for name in keys):
                for name in (other, *COMPANIONS.get(other, ())):
                    table.pop(name, None)


def _value(text: str) -> Any:
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except tomllib.TOMLDecodeError:
        return text


def _problem(
    error: Any, *, given: Mapping[str, Any], path: Path, lines: Mapping[Key, int], options: Sequence[Key]
) -> tuple[int, Problem]:
    """One of pydantic's errors in the words of a user's file, with its line for sorting."""
    context = error.get("ctx", {}) if error["type"] == "noonplate" else {}
    loc: Key = error["loc"]
    if "key" in context:
        loc += _split(context["key"])
    key, field, model = _walk(loc)
    name = ".".join(str(part) for part in key)
    line = _line_of(key, lines=lines)
    overridden = any(key[: len(option)] == option for option in options)
    where = "--set" if overridden else f"{path}:{line}" if line else str(path)
    what, got, allowed, do = _words(error, key=key, field=field, model=model)
    return line, Problem(
        where=where,
        what=f"{name}: {what}",
        got=context.get("got") or got,
        allowed=context.get("allowed") or allowed,
        do=do,
    )


def _words(error: Any, *, key: Key, field: FieldInfo | None, model: type[BaseModel]) -> tuple[str, str, str, str]:
    """What is wrong, what was given, what is allowed, what to do."""
    kind, value = error["type"], error["input"]
    allowed = _allowed(field)
    if kind == "noonplate":
        return error["msg"], "", "", ""
    if kind == "missing":
        return "required key missing", "", allowed, ""
    if kind == "extra_forbidden":
        close = difflib.get_close_matches(str(key[-1]), model.model_fields, n=1, cutoff=0.5)
        return (
            "unknown key",
            "",
            "" if close else ", ".join(model.model_fields),
            f"did you mean {close[0]}?" if close else "",
        )
    if kind == "literal_error":
        close = difflib.get_close_matches(str(value), re.findall(r"'([^']*)'", allowed), n=1, cutoff=0.5)
        return "unknown name", repr(value), allowed, f"did you mean '{close[0]}'?" if close else ""
    if kind == "too_long":
        return "too many entries", str(len(value)), f"at most {error['ctx']['max_length']}", ""
    if kind in {"too_short", "string_too_short"}:
        return "is empty", "", allowed, ""
    if kind.startswith(("greater", "less", "finite")):
        return "out of range", f"{value!r}", allowed, ""
    return "wrong type", _shown(value), allowed, ""


def _shown(value: Any) -> str:
    kind = {str: "text", bool: "true or false", dict: "a table", list: "a list"}.get(type(value), "")
    shown = repr(value) if len(repr(value)) < 60 else repr(value)[:57] + "..."
    return f"{shown} ({kind})" if kind else shown


def _allowed(field: FieldInfo | None) -> str:
    """Bounds, names or kind of a field, in words."""
    if field is None:
        return ""
    extra = field.json_schema_extra if isinstance(field.json_schema_extra, dict) else {}
    if "allowed" in extra:
        return str(extra["allowed"])
    low, high = _bound(field, "ge"), _bound(field, "le")
    if low is not None and high is not None:
        return f"{low:g} to {high:g} {extra.get('unit', '')}".strip()
    names = [name for name in get_args(field.annotation) if isinstance(name, str)]
    if names:
        return ", ".join(f"'{name}'" for name in names)
    return {"str": "text", "bool": "true or false"}.get(
        getattr(field.annotation, "__name__", ""), field.description or ""
    )


def _bound(field: FieldInfo, side: str) -> float | None:
    return next((value for item in field.metadata if (value := getattr(item, side, None)) is not None), None)


def _line_of(key: Key, *, lines: Mapping[Key, int]) -> int:
    """Line of a key, or of the nearest table around it; 0 if there is none."""
    return next((lines[key[:depth]] for depth in range(len(key), 0, -1) if key[:depth] in lines), 0)


def _walk(loc: Key) -> tuple[Key, FieldInfo | None, type[BaseModel]]:
    """The part of pydantic's path that is in the file, the field there and the table it stands in."""
    key: Key = ()
    model: type[BaseModel] = Scenario
    field: FieldInfo | None = None
    for part in loc:
        if isinstance(part, int):
            key += (part,)
            continue
        if field is not None and not (inner := list(_tables(field))):
            break
        if field is not None:
            model = inner[0]
        field = model.model_fields.get(part)
        key += (part,)
        if field is None:
            break
    return key, field, model


def _tables(field: FieldInfo) -> Iterator[type[BaseModel]]:
    for kind in (field.annotation, *get_args(field.annotation)):
        if isinstance(kind, type) and issubclass(kind, BaseModel):
            yield kind
