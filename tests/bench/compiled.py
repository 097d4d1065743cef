"""The compiled loop: built by the system's compiler, called through ctypes."""

from __future__ import annotations

import ctypes
import math
import shutil
import subprocess
import tempfile
from pathlib import Path

import numpy as np

from collector.balance.steady import Uptake
from collector.study.year import Conditions


class Build(ctypes.Structure):
    _fields_ = (
        *((name, ctypes.c_double) for name in ("gap", "exchange", "eps_front", "cos_tilt", "lean", "pressure")),
        *(
            (name, ctypes.c_double)
            for name in ("u_back", "u_edge", "conductivity", "thickness", "pitch", "outer", "inner")
        ),
        *((name, ctypes.c_double) for name in ("bond_resistance", "feed", "table_start", "table_step")),
        ("table_size", ctypes.c_int),
        ("at_inlet", ctypes.c_int),
    )


def compiled_loop(conditions: Conditions, uptake: Uptake):
    """A function that solves the year in C and returns useful gain, plate temperature and evaluations; None without a compiler."""
    compiler = shutil.which("cc") or shutil.which("gcc") or shutil.which("clang")
    if compiler is None:
        return None
    folder = Path(tempfile.mkdtemp(prefix="loop-"))
    source, library = Path(__file__).with_name("loop.c"), folder / "loop.so"
    subprocess.run([compiler, "-O2", "-fPIC", "-shared", "-o", library, source, "-lm"], check=True)
    solve = ctypes.CDLL(str(library)).solve
    solve.restype = ctypes.c_long
    shutil.rmtree(folder)

    network, absorber, stream, feed = (
        conditions.model.network,
        conditions.model.collector.absorber,
        uptake.stream,
        uptake.feed,
    )
    (gap,) = network.gaps
    tilt = math.radians(network.tilt_deg)
    build = Build(
        gap.thickness, gap.exchange, network.eps_front, math.cos(tilt), math.sin(1.8 * tilt) ** 1.6, network.pressure,
        network.u_back, network.u_edge, absorber.conductivity, absorber.thickness, absorber.pitch, absorber.outer,
        absorber.inner, absorber.bond_resistance, feed.temperature, stream.t[0], stream.t[1] - stream.t[0],
        len(stream.t), int(feed.at_inlet),
    )  # fmt: skip
    facing = network.facing(conditions.around)
    columns = [
        np.ascontiguousarray(values)
        for values in (
            conditions.absorbed.plate, conditions.absorbed.covers[0], facing.t_air, facing.h_wind, facing.radiant,
            stream.h_film, stream.capacity_rate,
        )
    ]  # fmt: skip
    n = len(conditions.absorbed.plate)
    useful, plate = np.zeros(n), np.zeros(n)
    pointers = [ctypes.c_void_p(values.ctypes.data) for values in (*columns, useful, plate)]

    def run() -> tuple[np.ndarray, np.ndarray, int]:
        assert columns  # keeps the arrays alive as long as the function
        return useful, plate, solve(ctypes.byref(build), n, *pointers)

    return run
