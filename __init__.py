"""Fault Net Slip: how far and which way faults really moved, from a digitized map."""


def classFactory(iface):  # noqa: N802 - QGIS's name
    """QGIS's door into the plugin; `iface` is None where there is no window."""
    from .plugin.entry import FaultNetSlip

    return FaultNetSlip(iface)
