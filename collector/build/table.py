"""Tables of keys in a TOML file: what every schema is made of, and how a file is read against it with each fault's line."""

from __future__ import annotations

import difflib
import re
import tomllib
from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any, TypeVar, get_args

from pydantic import BaseModel, ConfigDict, Field, ValidationError
from pydantic.fields import FieldInfo
from pydantic_core import PydanticCustomError

from weather.errors import InputError, Problem

__all__ = ["Key", "Table", "Where", "fault", "quantity", "read_table"]

Key = tuple[str | int, ...]
Where = Callable[[Key], str]
Sets = Sequence[Sequence[str]]  # sets of keys of a table of which exactly one set is to be given
Checked = TypeVar("Checked", bound=BaseModel)

HEADER = re.compile(r"^\s*(\[\[?)\s*([^\]#]+?)\s*\]\]?\s*(?:#.*)?$")
ENTRY = re.compile(r"^\s*((?:[\w-]+|\"[^\"]*\")(?:\s*\.\s*(?:[\w-]+|\"[^\"]*\"))*)\s*=")
LONGEST_SHOWN = 60  # characters of a value in a message


def quantity(low: float, high: float, unit: str, *, doc: str, default: Any = ...) -> Any:
    """Field that holds a number.

    Parameters
    ----------
    low, high
        Bounds, themselves allowed.
    unit
        As in the key's name; empty if it has none.
    doc
        Meaning, for messages and for the JSON schema.
    default
        If the key may be absent.

    Returns
    -------
    Any
        For a ``Table``.
    """
    return Field(default, ge=low, le=high, description=doc, json_schema_extra={"unit": unit})


def fault(message: str, *, key: str, allowed: str = "", got: str = "") -> PydanticCustomError:
    """Fault of a table as a whole, to be raised by its check.

    Parameters
    ----------
    message
        What is the matter.
    key
        Key in this table, dotted if it lies deeper, to which the fault is laid.
    allowed, got
        As for ``Problem``.

    Returns
    -------
    PydanticCustomError
        That `read_table` puts into words.
    """
    return PydanticCustomError("noonplate", "{what}", {"what": message, "key": key, "allowed": allowed, "got": got})


class Table(BaseModel):
    """A table of a file: unknown keys, wrong types and numbers that are none are refused."""

    model_config = ConfigDict(strict=True, extra="forbid", allow_inf_nan=False, frozen=True)

    def _one_of(self, sets: Sets, *, optional: bool = False) -> None:
        """Refuse keys of two rival sets together, a set in part, and no set at all."""
        begun = [keys for keys in sets if any(getattr(self, key) is not None for key in keys)]
        choices = ", or ".join(" with ".join(keys) for keys in sets)
        if not begun and not optional:
            raise fault("nothing given", key=sets[0][0], allowed=choices)
        if len(begun) > 1:
            given = [key for keys in begun for key in keys if getattr(self, key) is not None]
            raise fault("keys that exclude each other", key=given[-1], allowed=choices, got=", ".join(given))
        for key in begun[0] if begun else ():
            if getattr(self, key) is None:
                raise fault("required key missing beside its companions", key=key, allowed=choices)


def read_table(
    path: Path,
    *,
    model: type[Checked],
    overrides: Sequence[str] = (),
    rivals: Mapping[str, Sets] | None = None,
    companions: Mapping[str, Sequence[str]] | None = None,
    kind: str = "scenario file",
    do: str = "check the path",
    example: str = "collector.cover.0.gap_mm=20",
) -> tuple[Checked, Where]:
    """Read, override and check a TOML file.

    Parameters
    ----------
    path
        TOML file.
    model
        Its schema.
    overrides
        ``key.path=value``, the value written as in TOML; a bare word is text. A list's entry goes by its number, from 0.
    rivals
        Sets of keys of which one is to be given: an override of a key takes those of the other sets out.
    companions
        Keys that mean nothing without another, by that other: they go out with it.
    kind
        What the file is, for messages.
    do
        What to do if it can't be read.
    example
        Override of a list's entry, for messages.

    Returns
    -------
    tuple
        What the file describes, and the place of a key in it: file and line, or ``--set``.

    Raises
    ------
    InputError
        All faults together, in the file's order.
    """
    text = _text(path, kind=kind, do=do)
    given = _loaded(text, where=str(path))
    lines = _lines(text)
    options = []
    for option in overrides:
        try:
            key, value = _override(given, option=option)
        except LookupError:
            what, hint = f"no such place in the {kind}", "a list's entry goes by its number, from 0, and must exist"
            raise InputError(Problem(where="--set", what=what, got=_shown(option), do=f"{hint}: {example}")) from None
        _put(given, key=key, value=value, others=_others(rivals or {}, companions or {}, key=str(key[-1])))
        lines.pop(key, None)
        options.append(key)
    where = _where(path, lines=lines, options=options)
    try:
        return model.model_validate(given), where
    except ValidationError as found:
        raise InputError(_problems(found, model=model, lines=lines, where=where)) from None


def _text(path: Path, *, kind: str, do: str) -> str:
    try:
        return path.read_text(encoding="utf-8-sig")
    except OSError as refused:
        raise InputError(Problem(where=str(path), what=f"{kind} cannot be read: {refused.strerror}", do=do)) from None
    except UnicodeDecodeError:
        what, allowed = f"{kind} is not UTF-8 text", "a TOML file in UTF-8"
        raise InputError(Problem(where=str(path), what=what, allowed=allowed)) from None


def _loaded(text: str, *, where: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as broken:
        said = str(broken)
        if found := re.search(r"\(at line (\d+), column (\d+)\)", said):
            where = f"{where}:{found[1]}"
        what = said.partition(" (at")[0]
    except RecursionError:
        what = "brackets or tables nested too deep"
    except ValueError:  # Python's own limit
        what = "a number of too many digits"
    do = "text in quotes, decimals with a point, one key a line"
    raise InputError(Problem(where=where, what=f"not valid TOML: {what}", do=do))


def _lines(text: str) -> dict[Key, int]:
    """Line of each key and table, by its path; an array's tables counted from 0."""
    table: Key = ()
    counts: dict[Key, int] = {}
    found: dict[Key, int] = {}
    for number, line in enumerate(text.split("\n"), start=1):
        if header := HEADER.match(line):
            path = _split(header[2])
            table = _indexed(path, counts=counts, new=header[1] == "[[")
            found.setdefault(path, number)
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


def _override(given: Any, *, option: str) -> tuple[Key, Any]:
    """Path and value of one ``key.path=value``, its tables opened; a lookup error where there is no such place."""
    dotted, equals, text = option.partition("=")
    if not equals or not dotted.strip():
        got, allowed = _shown(option), "key.path=value"
        raise InputError(Problem(where="--set", what="not an override", got=got, allowed=allowed))
    key = tuple(_number_or_name(str(part)) for part in _split(dotted))
    for part in key[:-1]:
        given = given.setdefault(str(part), {}) if isinstance(given, dict) else _entry(given, part)
    if not isinstance(given, dict):
        _entry(given, key[-1])
    return key, _value(text.strip())


def _number_or_name(part: str) -> str | int:
    return int(part) if part.isdecimal() and len(part) < 10 else part


def _entry(given: Any, part: str | int) -> Any:
    if isinstance(given, list) and isinstance(part, int):
        return given[part]
    raise LookupError(part)


def _value(text: str) -> Any:
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except tomllib.TOMLDecodeError:
        return text
    except (ValueError, RecursionError):
        return _loaded(f"value = {text}", where="--set")


def _others(rivals: Mapping[str, Sets], companions: Mapping[str, Sequence[str]], *, key: str) -> set[str]:
    """Keys that a key excludes."""
    excluded = {
        name
        for sets in rivals.values()
        if any(key in keys for keys in sets)
        for keys in sets
        if key not in keys
        for name in keys
    }
    return excluded.union(*(companions.get(name, ()) for name in excluded))


def _put(given: Any, *, key: Key, value: Any, others: set[str]) -> None:
    for part in key[:-1]:
        given = given[str(part) if isinstance(given, dict) else part]
    if isinstance(given, dict):
        for name in others:
            given.pop(name, None)
    given[str(key[-1]) if isinstance(given, dict) else key[-1]] = value


def _where(path: Path, *, lines: Mapping[Key, int], options: Sequence[Key]) -> Where:
    """File and line of a key or of the nearest table around it, or the option that set it or opened its table."""

    def where(key: Key) -> str:
        opened = any(option[: len(key)] == key for option in options)
        if any(key[: len(option)] == option for option in options) or (opened and not _stands(key, lines=lines)):
            return "--set"
        return f"{path}:{line}" if (line := _line_of(key, lines=lines)) else str(path)

    return where


def _stands(key: Key, *, lines: Mapping[Key, int]) -> bool:
    """Whether the file's text has the key, or one below it."""
    return any(found[: len(key)] == key for found in lines)


def _line_of(key: Key, *, lines: Mapping[Key, int]) -> int:
    """Line of a key, or of the nearest table around it; 0 if there is none."""
    return next((lines[key[:depth]] for depth in range(len(key), 0, -1) if key[:depth] in lines), 0)


def _problems(
    found: ValidationError, *, model: type[BaseModel], lines: Mapping[Key, int], where: Where
) -> list[Problem]:
    """Pydantic's errors in the words of a user's file and in its order; one a key, the nearest to what may stand there."""
    nearest: dict[Key, tuple[int, Problem]] = {}
    for error in sorted(found.errors(include_url=False), key=_distance):
        loc: Key = error["loc"]
        context = error.get("ctx", {}) if error["type"] == "noonplate" else {}
        key, field, table = _walk(loc + (_split(context["key"]) if context else ()), model=model)
        what, got, allowed, do = _words(error, key=key, field=field, table=table)
        name = ".".join(str(part) for part in key)
        problem = Problem(where=where(key), what=f"{name}: {what}", got=got, allowed=allowed, do=do)
        nearest.setdefault(key, (_line_of(key, lines=lines), problem))
    return [problem for _, problem in sorted(nearest.values(), key=lambda pair: pair[0])]


def _distance(error: Any) -> int:
    """How far a value is from one of the kinds that a key may have: a wrong number from a number, and so on."""
    kind = error["type"]
    if kind == "literal_error":
        return 0 if isinstance(error["input"], str) else 2
    return 1 if kind.endswith("_type") else 0


def _words(error: Any, *, key: Key, field: FieldInfo | None, table: type[BaseModel]) -> tuple[str, str, str, str]:
    """What is wrong, what was given, what is allowed, what to do."""
    kind, value, allowed = error["type"], error["input"], _allowed(field)
    if kind == "noonplate":
        context = error["ctx"]
        return context["what"], context["got"], context["allowed"] or allowed, ""
    if kind == "missing":
        return "required key missing", "", allowed, ""
    if kind == "extra_forbidden":
        close = difflib.get_close_matches(str(key[-1]), table.model_fields, n=1, cutoff=0.5)
        return "unknown key", "", *(("", f"did you mean {close[0]}?") if close else (", ".join(table.model_fields), ""))
    if kind == "literal_error":
        names = re.findall(r"'([^']*)'", allowed)
        close = difflib.get_close_matches(value, names, n=1, cutoff=0.5) if isinstance(value, str) else []
        return "unknown name", _shown(value), allowed, f"did you mean '{close[0]}'?" if close else ""
    return _words_of_size(error, allowed) or ("wrong type", _described(value), allowed, _brackets(value, key, field))


def _words_of_size(error: Any, allowed: str) -> tuple[str, str, str, str] | None:
    kind, value = error["type"], error["input"]
    if kind == "too_long":
        return "too many entries", str(len(value)), f"at most {error['ctx']['max_length']}", ""
    if kind == "too_short" and value:
        return "too few entries", str(len(value)), allowed, ""
    if kind == "string_too_long":
        return "too long", f"{len(value)} characters", f"at most {error['ctx']['max_length']} characters", ""
    if kind in {"too_short", "string_too_short"}:
        return "is empty", "", allowed, ""
    if kind.startswith(("greater", "less", "finite")):
        return "out of range", _shown(value), allowed, ""
    return None


def _brackets(value: Any, key: Key, field: FieldInfo | None) -> str:
    """What to do about a single table where several may stand."""
    if field is None or not isinstance(value, dict) or not any(_tables(field)) or isinstance(key[-1], int):
        return ""
    name = ".".join(str(part) for part in key)
    several = any(getattr(kind, "__origin__", kind) is list for kind in (field.annotation, *get_args(field.annotation)))
    return f"write [[{name}]] with double brackets: there may be several" if several else ""


def _described(value: Any) -> str:
    kind = {str: "text", bool: "true or false", dict: "a table", list: "a list"}.get(type(value), "")
    return f"{_shown(value)} ({kind})" if kind else _shown(value)


def _shown(value: Any) -> str:
    try:
        shown = repr(value)
    except (ValueError, RecursionError):  # Python's own limits of digits and of nesting
        return "more than can be shown"
    return shown if len(shown) < LONGEST_SHOWN else shown[: LONGEST_SHOWN - 3] + "..."


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


def _walk(loc: Key, *, model: type[BaseModel]) -> tuple[Key, FieldInfo | None, type[BaseModel]]:
    """The part of pydantic's path that is in the file, the field there and the table it stands in."""
    key: Key = ()
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
