"""A digitized map as the computing room wants it: fault lines, contacts, ground and rules, from the parameters."""

from typing import NamedTuple

import numpy as np
from qgis.core import QgsProcessingException, QgsVectorLayerFeatureSource

from . import parameters as p
from .compat import is_null, layer_label
from .frame import Frame
from .ground import RasterGround
from .reading import Source, bad_geometries, field_of, joined, names, numbers, read_rows
from .structure import Contacts, FaultLines, MapRules, Problem, position_sd

MM_ON_MAP = 0.001
FAULT_FIELDS = {"name": "FAULT_NAME", "strike": "FAULT_AZIMUTH", "dip": "FAULT_DIP", "rake": "LINEATION_RAKE"}
CONTACT_FIELDS = {
    "marker": "MARKER",
    "strike": "CONTACT_AZIMUTH",
    "dip": "CONTACT_DIP",
    "att_error": "CONTACT_ERROR",
    "pos_error": "CONTACT_POSITION_ERROR",
}
NO_SOURCE = "could not be loaded: check that its file exists and is a line layer"


class MapData(NamedTuple):
    """Everything read: `fault_rows` and `contact_rows` remember layer and feature of each row for the problems."""

    frame: Frame
    fault_lines: FaultLines
    contacts: Contacts
    rules: MapRules
    ground: object
    problems: list
    fault_rows: object
    contact_rows: object


class Inputs(NamedTuple):
    """What must be taken from the project in the main thread: sources of features and a raster provider or None."""

    contacts: list
    raster: object


def prepare(algorithm, parameters, context):
    """`Inputs` of a run. Call it from prepareAlgorithm."""
    layers = algorithm.parameterAsLayerList(parameters, "CONTACTS", context) or []
    if not layers:
        raise QgsProcessingException(f"Contacts of markers: a layer {NO_SOURCE}.")
    sources = []
    for layer in layers:
        if not layer.isValid():
            raise QgsProcessingException(f"Layer '{layer.name()}' {NO_SOURCE}.")
        sources.append(Source(QgsVectorLayerFeatureSource(layer), layer_label(layer), layer.fields(), layer.crs()))
    return Inputs(sources, raster_provider(algorithm, parameters, context))


def raster_provider(algorithm, parameters, context):
    """A copy of the elevation raster's provider that a worker thread may use, or None."""
    if is_null(parameters.get("ELEVATION")) or parameters.get("ELEVATION") == "":
        return None
    raster = algorithm.parameterAsRasterLayer(parameters, "ELEVATION", context)
    if raster is None or not raster.isValid():
        raise QgsProcessingException("Ground elevation: the raster could not be loaded.")
    if not raster.crs().isValid():
        raise QgsProcessingException(
            f"Raster '{raster.name()}' has no coordinate reference system: set it in the layer's properties and run again."
        )
    return raster.dataProvider().clone()


def read_map(algorithm, parameters, context, feedback, inputs):
    """Read faults, contacts, ground and rules into a `MapData`."""
    faults = algorithm.parameterAsSource(parameters, "FAULTS", context)
    if faults is None:
        raise QgsProcessingException(algorithm.invalidSourceError(parameters, "FAULTS"))
    source = Source(faults, faults.sourceName(), faults.fields(), faults.sourceCrs())
    centre = faults.sourceExtent().center()
    z_metres = algorithm.parameterAsDouble(parameters, "Z_FACTOR", context)
    frame = Frame(source.crs, (centre.x(), centre.y()), context, source.label, z_metres)
    reader = _Reader(algorithm, parameters, context, feedback, frame)
    fault_rows = reader.rows(source, FAULT_FIELDS)
    contact_rows = joined([reader.rows(contacts, CONTACT_FIELDS) for contacts in inputs.contacts])
    ground = RasterGround(inputs.raster, frame, z_metres) if inputs.raster else None
    return MapData(
        frame,
        reader.fault_lines(fault_rows),
        reader.contacts(contact_rows),
        reader.rules(ground),
        ground,
        reader.problems,
        fault_rows,
        contact_rows,
    )


class _Reader:
    """Turns rows into the computing room's tables, and collects what could not be used."""

    def __init__(self, algorithm, parameters, context, feedback, frame):
        self.algorithm, self.parameters, self.context = algorithm, parameters, context
        self.feedback, self.frame = feedback, frame
        self.problems = []

    def number(self, name):
        return self.algorithm.parameterAsDouble(self.parameters, name, self.context)

    def given(self, name):
        """Whether an optional number was given; QGIS reads a missing one as 0."""
        value = self.parameters.get(name)
        return not is_null(value) and value != ""

    def choice(self, name):
        return self.algorithm.parameterAsEnumString(self.parameters, name, self.context)

    def rows(self, source, wanted):
        """Rows of a layer with the fields that the parameters name."""
        indices = {}
        for key, parameter in wanted.items():
            definition = self.algorithm.parameterDefinition(parameter)
            name = self.algorithm.parameterAsString(self.parameters, parameter, self.context)
            indices[key] = field_of(source, name, definition.defaultValue(), definition.description())
        return read_rows(source, indices, self.frame, self.feedback)

    def report(self, rows, reasons, name, consequence, advice, kind):
        """Problem rows for unusable values; returns a mask of the rows they concern."""
        bad = np.zeros(len(rows.geometry), bool)
        for row, reason in reasons.items():
            bad[row] = True
            where = {f"{kind}_row": row, ("fault" if kind == "fault" else "marker"): str(name[row])}
            self.problems.append(Problem(f"{consequence}: {reason}", advice, xyz=_place(rows.geometry[row]), **where))
        return bad

    def attitudes(self, rows, name, kind, consequence):
        """Strike from grid north and dip of every row, and a mask of rows with unusable values."""
        azimuth, bad_azimuth = numbers(rows.values["strike"], 0, 360, "azimuth")
        dip, bad_dip = numbers(rows.values["dip"], 0, 90, "dip")
        advice = "correct the value; strikes are 0-360 and dips 0-90 degrees"
        bad = self.report(rows, {**bad_azimuth, **bad_dip}, name, consequence, advice, kind)
        if self.choice("AZIMUTH_IS") == p.DIP_AZIMUTH:
            azimuth = azimuth - 90.0
        if self.choice("NORTH") == p.TRUE_NORTH:
            azimuth = azimuth + self.true_north(rows, ~np.isnan(azimuth))
        return azimuth % 360.0, dip, bad

    def true_north(self, rows, wanted):
        """Grid azimuth of true north at the rows that ask for it, 0 elsewhere."""
        angle = np.zeros(len(wanted))
        places = np.array([_place(geometry)[:2] for geometry in rows.geometry[wanted]]).reshape(-1, 2)
        angle[wanted] = np.nan_to_num(self.frame.true_north(places))
        return angle

    def fault_lines(self, rows):
        name, named = names(rows.values["name"], rows.feature)
        advice = "repair or delete the feature"
        unusable = self.report(rows, bad_geometries(rows), name, "fault left out", advice, "fault")
        strike, dip, bad = self.attitudes(rows, name, "fault", "fault left out")
        rake, bad_rake = numbers(rows.values["rake"], 0, 180, "rake")
        advice = "give rakes of slickenlines as 0-180 degrees down from the strike"
        self.report(rows, bad_rake, name, "slickenlines left out", advice, "fault")
        geometry = rows.geometry.copy()
        geometry[unusable | bad] = None
        return FaultLines(geometry, name, named, strike, dip, rake)

    def contacts(self, rows):
        marker, _ = names(rows.values["marker"], rows.layer)
        advice = "repair or delete the feature"
        unusable = self.report(rows, bad_geometries(rows), marker, "contact left out", advice, "contact")
        strike, dip, bad = self.attitudes(rows, marker, "contact", "attitude left out")
        strike[bad] = dip[bad] = np.nan
        error = self._errors(rows, marker, "att_error", "attitude error", 90, self.number("ATTITUDE_ERROR"))
        position = self._errors(rows, marker, "pos_error", "position error", 1e6, self.position_error())
        geometry = rows.geometry.copy()
        geometry[unusable] = None
        return Contacts(geometry, marker, strike, dip, error, position)

    def _errors(self, rows, marker, key, what, high, otherwise):
        """Errors given for single contacts, and the general one where there is none."""
        error, bad = numbers(rows.values[key], 0, high, what)
        self.report(rows, bad, marker, f"{what} taken as {otherwise:g}", f"correct the {what}", "contact")
        return np.where(np.isnan(error), otherwise, error)

    def position_error(self):
        """Standard deviation of a position in metres: as given, else from the map scale."""
        if self.given("POSITION_ERROR"):
            return self.number("POSITION_ERROR")
        return float(position_sd(self.number("MAP_SCALE")))

    def rules(self, ground):
        search = self._distance("SEARCH_DISTANCE") or MM_ON_MAP * self.number("MAP_SCALE")
        return MapRules(
            search=search,
            join_gaps=self._distance("JOIN_GAPS"),
            use_uncut=self.choice("UNCUT") == p.USE,
            assumed_dip=self.number("ASSUMED_DIP"),
            assumed_dip_error=self.number("ASSUMED_DIP_ERROR"),
            ground_step=ground.step() if ground else search,
        )

    def _distance(self, name):
        """A map distance in metres; 0 when not given. It comes in units of the fault layer."""
        value = self.number(name) if self.given(name) else 0.0
        if value > 0 and self.frame.map_crs.isGeographic():
            label = self.algorithm.parameterDefinition(name).description()
            raise QgsProcessingException(
                f"{label}: the fault layer's coordinates are degrees, in which no distance can be given. Leave it empty, "
                "or reproject the layer to a CRS in metres."
            )
        return value * self.frame.metres


def _place(geometry):
    """First point of a geometry as (x, y, nan); nan for one that has none."""
    if geometry is None or geometry.is_empty:
        return (float("nan"),) * 3
    point = geometry.geoms[0] if hasattr(geometry, "geoms") else geometry
    x, y = point.coords[0][:2]
    return (x, y, float("nan"))
