"""The provider: the algorithms in the toolbox under one name and icon."""

from pathlib import Path

from qgis.core import QgsProcessingProvider
from qgis.PyQt.QtGui import QIcon

from ..algorithms.findcutoffs import FindCutoffs
from ..algorithms.netslip import NetSlip
from ..algorithms.slipfromcutoffs import SlipFromCutoffs

ALGORITHMS = (FindCutoffs, NetSlip, SlipFromCutoffs)
ICON = Path(__file__).with_name("icon.svg")


class Provider(QgsProcessingProvider):
    """Lists the algorithms whether or not what they need is installed: each says so itself."""

    def id(self):
        return "faultnetslip"

    def name(self):
        return "Fault Net Slip"

    def icon(self):
        return QIcon(str(ICON))

    def loadAlgorithms(self):  # noqa: N802 - QGIS's name
        for algorithm in ALGORITHMS:
            self.addAlgorithm(algorithm())
