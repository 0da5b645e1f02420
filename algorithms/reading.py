"""From layers to arrays: geometries in metres, numbers from fields of any type, and a row for everything unusable."""

from typing import NamedTuple

import numpy as np
import shapely
from qgis.core import QgsFeatureRequest, QgsGeometry, QgsProcessingException, QgsProcessingFeatureSource, QgsWkbTypes

from .compat import is_null

CANCEL_EVERY = 500
SKIP_CHECK = QgsProcessingFeatureSource.Flag.FlagSkipGeometryValidityChecks  # judged here, a row for each bad one


class Source(NamedTuple):
    """A layer to read: what QGIS reads features from, its name for the user, fields and CRS."""

    features: object
    label: str
    fields: object
    crs: object


class Rows(NamedTuple):
    """Features as arrays of n rows: shapely lines in metres (None: unusable), values by field, feature ids, layer names."""

    geometry: np.ndarray
    values: dict
    feature: np.ndarray
    layer: np.ndarray


def field_of(source, name, default, label):
    """Index of a field: -1 for none asked for, or for a default that the layer does not have.

    Raises QgsProcessingException for a field that the user named and the layer lacks.
    """
    if not name:
        return -1
    index = source.fields.lookupField(name)
    if index < 0 and name != default:
        present = ", ".join(source.fields.names()) or "none"
        raise QgsProcessingException(f"{label}: layer '{source.label}' has no field '{name}'. It has: {present}.")
    return index


def _line(geometry):
    """ISO WKB of a QGIS geometry with curves made of segments, or None."""
    if geometry.isNull():
        return None
    if QgsWkbTypes.isCurvedType(geometry.wkbType()):
        geometry = QgsGeometry(geometry.constGet().segmentize())
    return bytes(geometry.asWkb())


def read_rows(source, fields, frame, feedback):
    """Read a layer's lines and the fields that `fields` maps names to (index -1: values are None).

    Raises QgsProcessingException for an empty layer or one without a CRS.
    """
    if not source.crs.isValid():
        raise QgsProcessingException(
            f"Layer '{source.label}' has no coordinate reference system: set it in the layer's properties and run again."
        )
    request = QgsFeatureRequest().setDestinationCrs(frame.crs, frame.transform_context)
    request.setSubsetOfAttributes([index for index in fields.values() if index >= 0])
    wkb, ids, values = [], [], {name: [] for name in fields}
    for number, feature in enumerate(_features(source.features, request)):
        if number % CANCEL_EVERY == 0 and feedback.isCanceled():
            break
        wkb.append(_line(feature.geometry()))
        ids.append(str(feature.id()))
        for name, index in fields.items():
            value = feature[index] if index >= 0 else None
            values[name].append(None if is_null(value) else value)
    if not wkb and not feedback.isCanceled():
        raise QgsProcessingException(f"Layer '{source.label}' is empty: there is nothing to read.")
    geometry = np.empty(len(wkb), object)
    geometry[:] = shapely.from_wkb(wkb, on_invalid="ignore")
    columns = {name: _objects(column) for name, column in values.items()}
    return Rows(_metric(geometry, frame), columns, np.array(ids, object), np.full(len(ids), source.label, object))


def _features(features, request):
    if isinstance(features, QgsProcessingFeatureSource):
        return features.getFeatures(request, SKIP_CHECK)
    request.setInvalidGeometryCheck(QgsFeatureRequest.InvalidGeometryCheck.GeometryNoCheck)
    return features.getFeatures(request)


def _objects(values):
    column = np.empty(len(values), object)
    column[:] = values
    return column


def _metric(geometry, frame):
    """Coordinates in metres."""
    if frame.metres == frame.z_metres == 1.0:
        return geometry
    scale = np.array([frame.metres, frame.metres, frame.z_metres])
    return shapely.transform(geometry, lambda c: c * scale[: c.shape[1]], include_z=bool(shapely.has_z(geometry).any()))


def joined(rows):
    """Rows of several layers one after the other."""
    return Rows(
        np.concatenate([part.geometry for part in rows]),
        {name: np.concatenate([part.values[name] for part in rows]) for name in rows[0].values},
        np.concatenate([part.feature for part in rows]),
        np.concatenate([part.layer for part in rows]),
    )


def bad_geometries(rows):
    """Reason by row number for geometries that cannot be used."""
    reasons = {}
    for row in np.flatnonzero(shapely.is_missing(rows.geometry) | shapely.is_empty(rows.geometry)):
        reasons[int(row)] = "it has no geometry"
    points, owner = shapely.get_coordinates(rows.geometry, return_index=True)
    for row in np.unique(owner[~np.isfinite(points).all(axis=1)]):
        reasons[int(row)] = "its coordinates are not finite, or have no image in the fault layer's CRS"
    no_length = ~shapely.is_empty(rows.geometry) & ~(shapely.length(rows.geometry) > 0)
    for row in np.flatnonzero(no_length & ~shapely.is_missing(rows.geometry)):
        reasons.setdefault(int(row), "its line has no length")
    return reasons


def numbers(values, low, high, what):
    """Numbers ``(n,)`` from values of any type, nan for missing ones, and a reason by row for the unusable.

    Text such as '045' or '45.5' counts as a number. Values outside low-high are unusable.
    """
    result, reasons = np.full(len(values), np.nan), {}
    for row, value in enumerate(values):
        if value is None or (isinstance(value, str) and not value.strip()):
            continue
        try:
            number = float(value)
        except (TypeError, ValueError):
            reasons[row] = f"its {what} '{value}' is not a number"
            continue
        if low <= number <= high:
            result[row] = number
        else:
            reasons[row] = f"its {what} {number:g} is outside {low:g}-{high:g}"
    return result, reasons


def names(values, otherwise):
    """Text of each value, or of `otherwise` where it is missing, and whether it was given."""
    given = np.array([value is not None and str(value).strip() != "" for value in values], bool)
    text = [str(value).strip() if ok else str(other) for value, ok, other in zip(values, given, otherwise)]
    return np.array(text, dtype=str), given
