"""The file of a coating layer by layer: its schema, and every fault in it with its line."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any, Literal

from pydantic import Field, model_validator

from collector.build.table import Table, Where, quantity, read_table

__all__ = ["LayerTable", "StackFile", "read_stack_file"]

WAYS = (("index_csv",), ("n", "k"), ("mixture",))  # sets of a layer's keys of which exactly one is to be given


def _name(doc: str, *, allowed: str = "path of a CSV file", default: Any = ...) -> Any:
    return Field(default, min_length=1, description=doc, json_schema_extra={"allowed": allowed})


class SubstrateTable(Table):
    """What the films lie on: opaque, or so thick that nothing comes back from its far side."""

    index_csv: str = _name("n and k over wavelength, relative to this file")


class MixtureTable(Table):
    """Two materials mixed finer than light can tell apart."""

    rule: Literal["bruggeman", "maxwell-garnett"] = Field(description="for equals, or for few spheres in a host")
    fraction: float = quantity(0.0, 1.0, "", doc="volume of the inclusion over the whole")
    inclusion_csv: str = _name("n and k of the inclusion")
    host_csv: str = _name("n and k of the host")


class LayerTable(Table):
    """One film."""

    name: str | None = _name("what it is called", allowed="text", default=None)
    thickness_nm: float = quantity(0.1, 20_000.0, "nm", doc="of the film")
    index_csv: str | None = _name("n and k over wavelength, relative to this file", default=None)
    n: float | None = quantity(1e-3, 100.0, "", doc="or: refractive index, the same at every wavelength", default=None)
    k: float | None = quantity(0.0, 1000.0, "", doc="extinction to go with n", default=None)
    mixture: MixtureTable | None = Field(
        None,
        description="or: a mixture of two materials",
        json_schema_extra={"allowed": "a table of rule, fraction, inclusion_csv, host_csv"},
    )

    @model_validator(mode="after")
    def _check(self) -> LayerTable:
        self._one_of(WAYS)
        return self


class StackFile(Table):
    """A coating layer by layer."""

    title: str = _name("stands over tables and figures", allowed="text")
    substrate: SubstrateTable = Field(description="the base", json_schema_extra={"allowed": "a table with index_csv"})
    layer: list[LayerTable] = Field(
        default_factory=list,
        max_length=50,
        description="outermost first; none is the bare base",
        json_schema_extra={"allowed": "at most 50 tables [[layer]]"},
    )


def read_stack_file(path: Path, *, overrides: Sequence[str] = ()) -> tuple[StackFile, Where]:
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
        What it describes, and the place of a key in it.
    """
    return read_table(
        path,
        model=StackFile,
        overrides=overrides,
        rivals={"layer": WAYS},
        kind="stack file",
        example="layer.0.thickness_nm=70",
    )
