"""The few places where QGIS versions differ. Nothing else in the plugin knows a version number."""

from qgis.core import NULL, Qgis, QgsField, QgsProviderRegistry
from qgis.PyQt.QtCore import QMetaType, QVariant

_BY_META_TYPE = Qgis.QGIS_VERSION_INT >= 33800  # QgsField takes QVariant types before, QMetaType types since

if _BY_META_TYPE:
    _TYPES = {"text": QMetaType.Type.QString, "real": QMetaType.Type.Double, "whole": QMetaType.Type.Int}
else:
    _TYPES = {"text": QVariant.String, "real": QVariant.Double, "whole": QVariant.Int}


def field(name, kind):
    """A field of kind 'text', 'real' or 'whole'."""
    return QgsField(name, _TYPES[kind])


def is_null(value):
    """Whether an attribute or parameter is missing: None, or QGIS's NULL."""
    return value is None or value == NULL


def finish(sink):
    """Write out what a sink still holds. Drop the last reference to it afterwards: older versions close it only then."""
    if hasattr(sink, "finalize"):
        sink.finalize()


def layer_label(layer):
    """What a user calls a layer: the name of its table in a file of several, else its name."""
    parts = QgsProviderRegistry.instance().decodeUri(layer.providerType(), layer.source())
    return parts.get("layerName") or layer.name()
