"""The second half of the job: net slip from a table of cutoffs."""

from qgis.core import QgsProcessing, QgsProcessingParameterFeatureSource

from . import parameters as p
from . import tables
from .base import Algorithm, tr


def cutoffs():
    """The layer that findcutoffs makes."""
    parameter = QgsProcessingParameterFeatureSource("CUTOFFS", tr("Cutoff lines"), [QgsProcessing.SourceType.TypeVectorLine])
    parameter.setHelp(tr("Cutoff lines as 'Find cutoffs' makes them, edited or not: one row for each marker and wall."))
    return parameter


class SlipFromCutoffs(Algorithm):
    """Net slip of faults from a table of cutoff lines, as 'Find cutoffs' makes it.

    Every marker needs one row in the hanging wall and one in the footwall of its fault. Azimuths in the table are from
    true north, z in metres.
    """

    ID = "slipfromcutoffs"
    TITLE = "Net slip from cutoffs"
    TAGS = ("fault", "slip", "cutoff", "piercing point", "separation", "throw", "heave", "rake")
    OUTPUTS = tables.ALL_TABLES

    def initAlgorithm(self, _configuration=None):  # noqa: N802 - QGIS's name
        p.add(self, (cutoffs, p.elevation, p.z_factor, p.map_scale), p.SOLVING)

    def prepareAlgorithm(self, parameters, context, _feedback):  # noqa: N802
        from .maps import raster_provider

        self.raster = raster_provider(self, parameters, context)
        return True

    def processAlgorithm(self, parameters, context, feedback):  # noqa: N802
        from . import run
        from .cutoff_table import read_cutoffs

        with run.stopping():
            data = read_cutoffs(self, parameters, context, feedback, self.raster)
            choices = run.options(self, parameters, context)
            layers = run.solve(data, data.faults, data.cutoffs, data.problems, choices, data.length, feedback)
            return run.finish_run(self, parameters, context, feedback, data.frame, layers)
        return {}
