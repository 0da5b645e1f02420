"""From arrays to layers: sinks, their rows, and the styles that they open with."""

from pathlib import Path

import numpy as np
import shapely
from qgis.core import (
    QgsFeature,
    QgsFeatureSink,
    QgsGeometry,
    QgsProcessingException,
    QgsProcessingLayerPostProcessorInterface,
    QgsProviderRegistry,
    QgsVectorLayer,
)

from .compat import finish

STYLES = Path(__file__).resolve().parent.parent / "plugin" / "styles"
FILES_WITH_STYLES = ".gpkg"
CANCEL_EVERY = 500
_post_processors = {}  # QGIS keeps no reference to them; by layer, so that a repeated run replaces its own


class OpenStyled(QgsProcessingLayerPostProcessorInterface):
    """Gives a layer its style when QGIS loads it, at the end of a run or of a model."""

    def __init__(self, style):
        super().__init__()
        self.style = style

    def postProcessLayer(self, layer, _context, _feedback):  # noqa: N802 - QGIS's name
        layer.loadNamedStyle(str(self.style))
        layer.triggerRepaint()


def write_layers(algorithm, parameters, context, feedback, frame, layers):
    """Write output layers; returns their ids by parameter name.

    All sinks are opened before the first row is written, so that one that cannot be opened stops the run early. When a
    row cannot be written, the files made by this run are removed.
    Raises QgsProcessingException.
    """
    opened, made = [], []
    try:
        for layer in layers:
            existed = _file_of(algorithm, parameters, context, layer.table.output)
            sink, destination = _open(algorithm, parameters, context, frame, layer.table)
            if sink is not None:
                opened.append((layer, sink, destination))
            made += [existed] if existed else []
        for layer, sink, destination in opened:
            _fill(algorithm, sink, layer, frame, feedback, destination)
    except QgsProcessingException:
        opened.clear()
        sink = None
        for path in made:
            path.unlink(missing_ok=True)
        raise
    ids = {layer.table.output: destination for layer, _, destination in opened}
    tables = [(layer.table, destination) for layer, _, destination in opened]
    opened.clear()
    sink = layer = None
    for table, destination in tables:
        _style(table, destination, context)
    return ids


def _file_of(algorithm, parameters, context, name):
    """The file that an output is about to create: None where it exists already, or is no file."""
    text = algorithm.parameterAsOutputLayer(parameters, name, context) if parameters.get(name) else ""
    path = Path(text) if text and "=" not in text else None
    return path if path and path.suffix and not path.exists() else None


def _open(algorithm, parameters, context, frame, table):
    """Sink and id of an output, or (None, '') for an optional one that is not asked for."""
    if not parameters.get(table.output):
        return None, ""
    sink, destination = algorithm.parameterAsSink(
        parameters, table.output, context, table.fields(), table.geometry, frame.map_crs
    )
    if sink is None:
        raise QgsProcessingException(algorithm.invalidSinkError(parameters, table.output))
    return sink, destination


def _fill(algorithm, sink, layer, frame, feedback, destination):
    wkb = shapely.to_wkb(on_map(layer.geometry, frame), output_dimension=3, flavor="iso")
    fields = layer.table.fields()
    for number, (row, geometry) in enumerate(zip(layer.table.rows(layer.columns), wkb)):
        if number % CANCEL_EVERY == 0 and feedback.isCanceled():
            break
        feature = QgsFeature(fields)
        feature.setAttributes(row)
        if geometry is not None:
            shape = QgsGeometry()
            shape.fromWkb(geometry)
            feature.setGeometry(shape)
        if not sink.addFeature(feature, QgsFeatureSink.Flag.FastInsert):
            raise QgsProcessingException(
                f"{layer.table.title}: feature {number + 1} could not be written to {destination}: {sink.lastError()}"
            )
    finish(sink)


def on_map(geometry, frame):
    """Geometries in metres of the frame taken to the results' CRS; z stays in metres."""

    def move(coordinates):
        return np.column_stack([frame.to_map(coordinates[:, :2]), coordinates[:, 2:]])

    if not len(geometry) or (frame.metres == 1.0 and frame.crs == frame.map_crs):
        return geometry
    has_z = bool(shapely.has_z(geometry).any())
    return shapely.transform(geometry, move, include_z=has_z)


def _style(table, destination, context):
    """Let a layer open styled: when QGIS loads it now, and from a GeoPackage at any time."""
    style = STYLES / f"{table.style}.qml"
    if context.willLoadLayerOnCompletion(destination):
        _post_processors[destination] = OpenStyled(style)
        context.layerToLoadOnCompletionDetails(destination).setPostProcessor(_post_processors[destination])
    parts = QgsProviderRegistry.instance().decodeUri("ogr", destination)
    if str(parts.get("path", "")).endswith(FILES_WITH_STYLES):
        layer = QgsVectorLayer(destination, table.title, "ogr")
        if layer.isValid() and layer.loadNamedStyle(str(style))[1]:
            layer.saveStyleToDatabase("default", table.title, True, "")
