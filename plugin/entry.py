"""The plugin as QGIS starts and stops it."""

from qgis.core import QgsApplication

from .provider import Provider


class FaultNetSlip:
    """Adds the provider of the algorithms; there is nothing else to start."""

    def __init__(self, iface):
        self.iface = iface
        self.provider = None

    def initProcessing(self):  # noqa: N802 - QGIS's name
        """Register the provider; QGIS calls only this where it has no window."""
        self.provider = Provider()
        QgsApplication.processingRegistry().addProvider(self.provider)

    def initGui(self):  # noqa: N802
        self.initProcessing()

    def unload(self):
        if self.provider is not None:
            QgsApplication.processingRegistry().removeProvider(self.provider)
            self.provider = None
