"""A layer of cutoff lines read back into the computing room's tables."""

from typing import NamedTuple

import numpy as np
import shapely
from qgis.core import QgsProcessingException

from .frame import Frame
from .ground import RasterGround
from .outputs import BLOCKS
from .reading import Source, bad_geometries, names, numbers, read_rows
from .structure import Cutoffs, Faults, Problem
from .tables import CUTOFF_LINES, REAL

MM_ON_MAP = 0.001
NEEDED = ("fault", "block", "marker", "strike", "dip", "flt_strike", "flt_dip")
BOUNDS = {"strike": (0, 360), "dip": (0, 90), "flt_strike": (0, 360), "flt_dip": (0, 90), "flt_rake": (0, 180)}
BAD_ROW = "correct the row; the help of 'Find cutoffs' says what each field holds"


class CutoffData(NamedTuple):
    """What a table of cutoffs says; `length` metres of a cutoff line without a piercing point."""

    frame: Frame
    faults: Faults
    cutoffs: Cutoffs
    ground: object
    problems: list
    length: float
    fault_rows: object
    contact_rows: object


def read_cutoffs(algorithm, parameters, context, feedback, raster):
    """Read a layer of cutoff lines into a `CutoffData`.

    Raises QgsProcessingException for a layer without the fields that solving needs.
    """
    layer = algorithm.parameterAsSource(parameters, "CUTOFFS", context)
    if layer is None:
        raise QgsProcessingException(algorithm.invalidSourceError(parameters, "CUTOFFS"))
    source = Source(layer, layer.sourceName(), layer.fields(), layer.sourceCrs())
    lacking = [name for name in NEEDED if source.fields.lookupField(name) < 0]
    if lacking:
        raise QgsProcessingException(
            f"Layer '{source.label}' has no field {', '.join(lacking)}: give a layer made by 'Find cutoffs'."
        )
    centre = layer.sourceExtent().center()
    # z of the cutoffs is in metres whatever the raster's unit
    frame = Frame(source.crs, (centre.x(), centre.y()), context, source.label)
    indices = {column.name: source.fields.lookupField(column.name) for column in CUTOFF_LINES.columns}
    rows = read_rows(source, indices, frame, feedback)
    problems, usable, values = _checked(rows)
    scale = algorithm.parameterAsDouble(parameters, "MAP_SCALE", context)
    z_metres = algorithm.parameterAsDouble(parameters, "Z_FACTOR", context)
    faults, fault = _faults(rows, values, usable, frame)
    cutoffs = _cutoffs(rows, values, usable, fault, frame, algorithm.parameterAsDouble(parameters, "ATTITUDE_ERROR", context))
    ground = RasterGround(raster, frame, z_metres) if raster else None
    return CutoffData(frame, faults, cutoffs, ground, problems, 8 * MM_ON_MAP * scale, rows, rows)


def _checked(rows):
    """Problems, a mask of usable rows, and the numbers of every real field."""
    reasons, values = bad_geometries(rows), {}
    for column in CUTOFF_LINES.columns:
        if column.kind == REAL:
            low, high = BOUNDS.get(column.name, (-np.inf, np.inf))
            values[column.name], bad = numbers(rows.values[column.name], low, high, column.name)
            reasons.update(bad)
    for row, block in enumerate(rows.values["block"]):
        if block not in BLOCKS:
            reasons.setdefault(row, f"its block '{block}' is neither 'hanging wall' nor 'footwall'")
    for row in np.flatnonzero(np.isnan(values["flt_strike"]) | np.isnan(values["flt_dip"])):
        reasons.setdefault(int(row), "its fault has no attitude (flt_strike, flt_dip)")
    usable = np.ones(len(rows.geometry), bool)
    usable[list(reasons)] = False
    problems = [
        Problem(f"cutoff left out: {reason}", BAD_ROW, *_who(rows, row), contact_row=row)
        for row, reason in sorted(reasons.items())
    ]
    return problems, usable, values


def _who(rows, row):
    return str(rows.values["fault"][row] or ""), str(rows.values["marker"][row] or "")


def _first_points(geometry):
    """First vertex of every line, ``(n, 3)``; level ground at 0 where there is no z."""
    first = shapely.get_point(shapely.get_geometry(geometry, 0), 0)
    xyz = np.column_stack([shapely.get_x(first), shapely.get_y(first), shapely.get_z(first)])
    xyz[:, 2] = np.nan_to_num(xyz[:, 2])
    return xyz


def _faults(rows, values, usable, frame):
    """The fault table of the usable rows, attitudes of each fault from its first row, and the fault of each row."""
    name, _ = names(rows.values["fault"][usable], rows.feature[usable])
    unique, first, fault = np.unique(name, return_index=True, return_inverse=True)
    row = np.flatnonzero(usable)[first]
    north = frame.true_north(_first_points(rows.geometry[row])[:, :2])
    return (
        Faults(
            name=unique,
            row=row,
            strike=(values["flt_strike"][row] + north) % 360.0,
            dip=values["flt_dip"][row],
            dip_spread=np.nan_to_num(values["flt_dip_un"][row]),
            rake=values["flt_rake"][row],
            reversed_pieces=np.zeros(len(unique), bool),
        ),
        fault,
    )


def _cutoffs(rows, values, usable, fault, frame, att_error):
    xyz = _first_points(rows.geometry[usable])
    marker, _ = names(rows.values["marker"][usable], rows.layer[usable])
    chosen = {name: column[usable] for name, column in values.items()}
    return Cutoffs(
        fault=fault,
        marker=marker,
        hanging=rows.values["block"][usable] == BLOCKS[1],
        xyz=xyz,
        slope=np.nan_to_num(np.stack([chosen["slope_e"], chosen["slope_n"]], axis=1)),
        strike=(chosen["strike"] + frame.true_north(xyz[:, :2])) % 360.0,
        dip=chosen["dip"],
        att_error=np.where(np.isnan(chosen["att_error"]), att_error, chosen["att_error"]),
        pos_error=np.nan_to_num(chosen["pos_error"]),
        gap=np.nan_to_num(chosen["gap"]),
        contact=np.flatnonzero(usable),
    )
