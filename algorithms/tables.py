"""The output tables: every field's name, type and meaning, written once.

A table gives a sink its fields, turns named arrays into attribute rows, and tells the help what each field holds. Field
names have at most ten characters, so that a Shapefile keeps them.
"""

import math
from typing import NamedTuple

from qgis.core import QgsFields, QgsWkbTypes

from .compat import field

TEXT, REAL, WHOLE = "text", "real", "whole"


class Column(NamedTuple):
    """One field: name (also the name of its array), type, and what it holds."""

    name: str
    kind: str
    help: str


class Table(NamedTuple):
    """One output layer: parameter name, title, style file, geometry type and columns."""

    output: str
    title: str
    style: str
    geometry: QgsWkbTypes.Type
    columns: tuple

    def fields(self):
        """The fields as QGIS wants them."""
        fields = QgsFields()
        for column in self.columns:
            fields.append(field(column.name, column.kind))
        return fields

    def rows(self, values):
        """Attribute rows (lists of Python scalars) from a dictionary of equally long arrays, one for each column.

        Raises ValueError when a column is missing or a name unknown; nan and '' become NULL.
        """
        names = {column.name for column in self.columns}
        if names != set(values):
            raise ValueError(f"{self.output}: columns {sorted(names ^ set(values))} are missing or unknown")
        casts = [_CASTS[column.kind] for column in self.columns]
        columns = [[cast(value) for value in values[column.name]] for cast, column in zip(casts, self.columns)]
        return [list(row) for row in zip(*columns)]


def _text(value):
    return str(value) or None


def _real(value):
    number = float(value)
    return number if math.isfinite(number) else None


_CASTS = {TEXT: _text, REAL: _real, WHOLE: int}

FAULT = Column("fault", TEXT, "name of the fault, else its feature id")
MARKER = Column("marker", TEXT, "name of the marker")
BLOCK = Column("block", TEXT, "'hanging wall' or 'footwall'; of a vertical fault its right-hand side by the strike counts as hanging wall")
CROSSING = Column("cross_ang", REAL, "widest angle at which cutoff lines cross in the fault plane, degrees")
MARKERS = Column("markers", TEXT, "markers used")
LEAST = Column("least_slip", REAL, "smallest slip that makes the separation of a lone marker, m")


def _interval(name, what, unit):
    return (
        Column(f"{name}_med", REAL, f"{what}: median of the samples, {unit}"),
        Column(f"{name}_lo", REAL, f"{what}: lower 95 % bound, {unit}"),
        Column(f"{name}_hi", REAL, f"{what}: upper 95 % bound, {unit}"),
    )


SLIP_VECTORS = Table(
    "SLIP_VECTORS",
    "Slip vectors",
    "slip_vectors",
    QgsWkbTypes.Type.LineStringZ,
    (
        FAULT,
        MARKERS,
        Column("n_markers", WHOLE, "number of markers used"),
        Column("method", TEXT, "'markers', 'lineation' (slickenlines), or 'separation': one component only, no net slip"),
        Column("net_slip", REAL, "net slip, m"),
        *_interval("slip", "net slip", "m"),
        Column("rake", REAL, "rake of slip, degrees: 0 sinistral, 90 reverse, 180 dextral, -90 normal"),
        *_interval("rake", "rake", "degrees"),
        Column("rake_note", TEXT, "acute rake from the strike and the strike's end, '41 NW'"),
        Column("trend", REAL, "trend of the slip line's downward end, degrees from true north"),
        *_interval("trend", "trend", "degrees"),
        Column("plunge", REAL, "plunge of the slip line, degrees"),
        *_interval("plunge", "plunge", "degrees"),
        Column("slip_az", REAL, "azimuth toward which the hanging wall moved, degrees from true north"),
        Column("strikeslip", REAL, "strike slip, m, positive sinistral"),
        *_interval("ss", "strike slip", "m"),
        Column("dip_slip", REAL, "dip slip, m, positive normal"),
        *_interval("ds", "dip slip", "m"),
        Column("heave", REAL, "horizontal component of the dip slip, m, positive extension"),
        *_interval("heave", "heave", "m"),
        Column("throw", REAL, "vertical component, m, positive hanging wall down"),
        *_interval("throw", "throw", "m"),
        Column("d_east", REAL, "movement of the hanging wall toward the east of the layer's grid, m"),
        Column("d_north", REAL, "movement toward the north of the layer's grid, m"),
        Column("d_up", REAL, "movement upward, m"),
        Column("sense", TEXT, "sense of slip in words"),
        Column("sense_prob", REAL, "probability of that sense, 0-1"),
        Column("p_normal", REAL, "probability of a normal dip slip, 0-1"),
        Column("p_sinist", REAL, "probability of a sinistral strike slip, 0-1"),
        CROSSING,
        Column("misfit", REAL, "chi-square per degree of freedom of three or more markers; about 1 when they agree"),
        Column("rotation", REAL, "turn of the hanging wall's cutoffs against the footwall's, degrees (per_block)"),
        LEAST,
        Column("var_shares", TEXT, "share of the variance of the net slip that each input causes, largest first"),
        Column("flt_strike", REAL, "strike of the fault, degrees from true north"),
        Column("flt_dip", REAL, "dip of the fault, degrees"),
        Column("caution", TEXT, "what a reader must know beside the number"),
    ),
)

PIERCING_POINTS = Table(
    "PIERCING_POINTS",
    "Piercing points",
    "piercing_points",
    QgsWkbTypes.Type.PointZ,
    (
        FAULT,
        BLOCK,
        MARKERS,
        Column("elev", REAL, "elevation of the piercing point, m"),
        Column("depth", REAL, "depth below the ground above it, m, negative in the air"),
        CROSSING,
        Column("sd_strike", REAL, "standard deviation along the fault's strike, m"),
        Column("sd_dip", REAL, "standard deviation down the fault's dip, m"),
    ),
)

CUTOFF_LINES = Table(
    "CUTOFF_LINES",
    "Cutoff lines",
    "cutoff_lines",
    QgsWkbTypes.Type.LineStringZ,
    (
        FAULT,
        BLOCK,
        MARKER,
        Column("state", TEXT, "'matched', 'one side only' or 'ambiguous'"),
        Column("strike", REAL, "strike of the marker in this block, degrees from true north"),
        Column("dip", REAL, "dip of the marker in this block, degrees"),
        Column("att_error", REAL, "angular error of that attitude, degrees"),
        Column("flt_strike", REAL, "strike of the fault, degrees from true north"),
        Column("flt_dip", REAL, "dip of the fault, degrees"),
        Column("flt_dip_un", REAL, "half width of the uniform spread of an assumed dip, degrees; 0 for a given dip"),
        Column("flt_rake", REAL, "rake of the fault's slickenlines, 0-180 down from the strike"),
        Column("trend", REAL, "trend of the cutoff line, degrees from true north"),
        Column("plunge", REAL, "plunge of the cutoff line, degrees"),
        Column("rake", REAL, "rake of the cutoff line in the fault, 0-180 down from the strike"),
        Column("gap", REAL, "how far the contact was prolonged to the fault, m"),
        Column("off_plane", REAL, "distance of the cutoff from the fault's mean plane, m"),
        Column("pos_error", REAL, "standard deviation of easting and of northing of the cutoff, m"),
        Column("slope_e", REAL, "rise of the ground eastward at the cutoff, m per m"),
        Column("slope_n", REAL, "rise of the ground northward at the cutoff, m per m"),
    ),
)

SEPARATIONS = Table(
    "SEPARATIONS",
    "Separations",
    "separations",
    QgsWkbTypes.Type.LineStringZ,
    (
        FAULT,
        MARKER,
        Column("strike_sep", REAL, "strike separation, m, positive sinistral"),
        Column("dip_sep", REAL, "dip separation, m, positive normal"),
        Column("perp_sep", REAL, "separation across the marker, m"),
        LEAST,
        Column("rake", REAL, "rake of the line of possible slips, parallel to the cutoff line, 0-180 down from strike"),
        Column("app_sense", TEXT, "apparent sense in words"),
        Column("residual", REAL, "misfit of this marker in the fault's solution, m across the marker"),
    ),
)

CONFIDENCE = Table(
    "CONFIDENCE",
    "Confidence regions",
    "confidence",
    QgsWkbTypes.Type.Polygon,
    (FAULT, MARKERS, Column("level", REAL, "probability that the tip of the slip vector lies inside, in map view")),
)

PROBLEMS = Table(
    "PROBLEMS",
    "Problems",
    "problems",
    QgsWkbTypes.Type.PointZ,
    (
        FAULT,
        MARKER,
        Column("reason", TEXT, "what was left out or is doubtful, and why"),
        Column("advice", TEXT, "what to do next"),
        Column("layer", TEXT, "input layer that it concerns"),
        Column("feature", TEXT, "id of the feature in that layer"),
    ),
)

ALL_TABLES = (SLIP_VECTORS, PIERCING_POINTS, CUTOFF_LINES, SEPARATIONS, CONFIDENCE, PROBLEMS)
