"""The file of a coating layer by layer: its schema, and every fault in it with its line."""

from __future__ import annotations

import difflib
import re
import tomllib
from collections.abc import Sequence
from pathlib import Path
from typing import Any, Literal, NamedTuple, get_args

from pydantic import BaseModel, ConfigDict, Field, ValidationError, model_validator
from pydantic_core import PydanticCustomError

from weather.errors import InputError, Problem

__all__ = ["LayerTable", "StackFile", "StackText", "read_stack_file"]

Key = tuple[str | int, ...]
LINE = re.compile(r"^\s*(?:(\[\[?)\s*([\w.-]+)\s*\]\]?|([\w.-]+)\s*=)")
WAYS = (("index_csv",), ("n", "k"), ("mixture",))  # sets of a layer's keys of which exactly one is to be given


def _number(low: float, high: float, unit: str, *, doc: str, default: Any = ...) -> Any:
    allowed = f"{low:g} to {high:g} {unit}".strip()
    return Field(default, ge=low, le=high, description=doc, json_schema_extra={"allowed": allowed})


def _name(doc: str, *, allowed: str = "path of a CSV file", default: Any = ...) -> Any:
    return Field(default, min_length=1, description=doc, json_schema_extra={"allowed": allowed})


class _Table(BaseModel):
    model_config = ConfigDict(strict=True, extra="forbid", allow_inf_nan=False, frozen=True)


class SubstrateTable(_Table):
    """What the films lie on: opaque, or so thick that nothing comes back from its far side."""

    index_csv: str = _name("n and k over wavelength, relative to this file")


class MixtureTable(_Table):
    """Two materials mixed finer than light can tell apart."""

    rule: Literal["bruggeman", "maxwell-garnett"] = Field(
        description="for equals, or for few spheres in a host",
        json_schema_extra={"allowed": "'bruggeman', 'maxwell-garnett'"},
    )
    fraction: float = _number(0.0, 1.0, "", doc="volume of the inclusion over the whole")
    inclusion_csv: str = _name("n and k of the inclusion")
    host_csv: str = _name("n and k of the host")


class LayerTable(_Table):
    """One film."""

    name: str | None = _name("what it is called", allowed="text", default=None)
    thickness_nm: float = _number(0.1, 20_000.0, "nm", doc="of the film")
    index_csv: str | None = _name("n and k over wavelength, relative to this file", default=None)
    n: float | None = _number(1e-3, 100.0, "", doc="or: refractive index, the same at every wavelength", default=None)
    k: float | None = _number(0.0, 1000.0, "", doc="extinction to go with n", default=None)
    mixture: MixtureTable | None = Field(
        None,
        description="or: a mixture of two materials",
        json_schema_extra={"allowed": "a table of rule, fraction, inclusion_csv, host_csv"},
    )

    @model_validator(mode="after")
    def _check(self) -> LayerTable:
        given = [key for keys in WAYS for key in keys if getattr(self, key) is not None]
        if given not in [list(keys) for keys in WAYS]:
            what = "a film's index is to be given in exactly one way"
            raise PydanticCustomError("noonplate", what, {"got": ", ".join(given) or "none"})
        return self


class StackFile(_Table):
    """A coating layer by layer."""

    title: str = _name("stands over tables and figures", allowed="text")
    substrate: SubstrateTable = Field(description="the base", json_schema_extra={"allowed": "a table with index_csv"})
    layer: list[LayerTable] = Field(
        default_factory=list,
        max_length=50,
        description="outermost first; none is the bare base",
        json_schema_extra={"allowed": "at most 50 tables [[layer]]"},
    )


class StackText(NamedTuple):
    """A stack file as it was given, with the line of each key."""

    path: Path
    given: dict[str, Any]
    lines: dict[Key, int]
    overridden: list[Key]

    def where(self, key: Key) -> str:
        """File and line of a key or of the nearest table around it, or the option that set it."""
        if any(key[: len(option)] == option for option in self.overridden):
            return "--set"
        line = next((self.lines[key[:depth]] for depth in range(len(key), 0, -1) if key[:depth] in self.lines), 0)
        return f"{self.path}:{line}" if line else str(self.path)


def read_stack_file(path: Path, *, overrides: Sequence[str] = ()) -> tuple[StackFile, StackText]:
    """Read, override and check a stack file.

    Parameters
    ----------
    path
        TOML file.
    overrides
        ``key.path=value`` as in TOML; a layer goes by its number, from 0: ``layer.0.thickness_nm=70``.

    Returns
    -------
    tuple
        What it describes, and where in its text each key stands.

    Raises
    ------
    InputError
        All faults together.
    """
    source = _source(path, overrides=overrides)
    try:
        return StackFile.model_validate(source.given), source
    except ValidationError as found:
        raise InputError([_problem(error, source=source) for error in found.errors()]) from None


def _source(path: Path, *, overrides: Sequence[str]) -> StackText:
    try:
        text = path.read_text(encoding="utf-8-sig")
        given = tomllib.loads(text)
    except OSError as fault:
        what = f"stack file cannot be read: {fault.strerror}"
        raise InputError(Problem(where=str(path), what=what, do="check the path")) from None
    except tomllib.TOMLDecodeError as fault:
        line = re.search(r"at line (\d+)", str(fault))
        where, what = f"{path}:{line[1]}" if line else str(path), f"not valid TOML: {str(fault).partition(' (at')[0]}"
        raise InputError(Problem(where=where, what=what, do="text in quotes, decimals with a point")) from None
    except UnicodeDecodeError:
        what, allowed = "stack file is not UTF-8 text", "a TOML file in UTF-8"
        raise InputError(Problem(where=str(path), what=what, allowed=allowed)) from None
    return StackText(path, given, _lines(text), [_override(given, option=option) for option in overrides])


def _lines(text: str) -> dict[Key, int]:
    """Line of each table and key; the layers counted from 0."""
    found: dict[Key, int] = {}
    table: Key = ()
    layers = 0
    for number, line in enumerate(text.splitlines(), start=1):
        match = LINE.match(line)
        if match and match[1]:
            table = tuple(match[2].split("."))
            if table[0] == "layer":
                found.setdefault(("layer",), number)
                layers += match[1] == "[["
                table = ("layer", layers - 1, *table[1:])
            found.setdefault(table, number)
        elif match:
            found.setdefault(table + tuple(match[3].split(".")), number)
    return found


def _override(given: dict[str, Any], *, option: str) -> Key:
    """Put one ``key.path=value`` into the file's content; returns the path."""
    dotted, equals, value = option.partition("=")
    key: Key = tuple(int(part) if part.isdigit() else part for part in dotted.strip().split("."))
    table: Any = given
    for part in key[:-1]:
        table = table[part] if _holds(table, part) else None
    if not equals or not (isinstance(table, dict) or _holds(table, key[-1])):
        what, allowed = "no such place in the stack file", "key.path=value; layers by number: layer.0.thickness_nm=70"
        raise InputError(Problem(where="--set", what=what, got=repr(option), allowed=allowed))
    table[key[-1]] = _value(value.strip())
    return key


def _holds(table: Any, part: str | int) -> bool:
    """Whether a table has this key, or a list this number."""
    return part in (range(len(table)) if isinstance(table, list) else table if isinstance(table, dict) else ())


def _value(text: str) -> Any:
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except tomllib.TOMLDecodeError:
        return text


def _problem(error: Any, *, source: StackText) -> Problem:
    """One of pydantic's errors in the words of the file."""
    kind, key, value = error["type"], error["loc"], error["input"]
    model, allowed = _place_of(key)
    what, got, do = "wrong type", repr(value)[:60], ""
    if kind == "noonplate":
        ways = ", or ".join(" with ".join(keys) for keys in WAYS)
        what, got, allowed = error["msg"], error["ctx"]["got"], ways
    elif kind == "missing":
        what, got = "required key missing", ""
    elif kind == "extra_forbidden":
        close = difflib.get_close_matches(str(key[-1]), model.model_fields, n=1, cutoff=0.5)
        what, got, do = "unknown key", "", f"did you mean {close[0]}?" if close else ""
        allowed = "" if close else ", ".join(model.model_fields)
    elif kind == "literal_error":
        what = "unknown name"
    elif kind.endswith(("too_long", "too_short")):
        what, got = ("too many entries", str(len(value))) if kind == "too_long" else ("is empty", "")
    elif kind.startswith(("greater", "less", "finite")):
        what = "out of range"
    name = ".".join(map(str, key))
    return Problem(where=source.where(key), what=f"{name}: {what}", got=got, allowed=allowed, do=do)


def _place_of(key: Key) -> tuple[type[BaseModel], str]:
    """The table in which a key stands, and what is allowed there."""
    model: type[BaseModel] = StackFile
    allowed = ""
    for part in (part for part in key if isinstance(part, str)):
        field = model.model_fields.get(part)
        if field is None:
            return model, ""
        allowed = str(field.json_schema_extra["allowed"]) if isinstance(field.json_schema_extra, dict) else ""
        last = part == key[-1]
        inner = [kind for kind in (field.annotation, *get_args(field.annotation)) if _is_table(kind)]
        model = inner[0] if inner and not last else model
    return model, allowed


def _is_table(kind: Any) -> bool:
    return isinstance(kind, type) and issubclass(kind, BaseModel)
