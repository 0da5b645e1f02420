"""The first half of the job: where every marker ends against every fault."""

from . import parameters as p
from . import tables
from .base import Algorithm


class FindCutoffs(Algorithm):
    """Finds where contacts end against faults, on which wall, and the cutoff line of each.

    The result is a table that a geologist can inspect and edit: rename a marker, correct an attitude, delete a cutoff.
    'Net slip from cutoffs' takes it as it comes. A line's first vertex is the cutoff point, its z in metres.
    """

    ID = "findcutoffs"
    TITLE = "Find cutoffs"
    TAGS = ("fault", "cutoff", "contact", "hanging wall", "footwall", "marker")
    OUTPUTS = (tables.CUTOFF_LINES, tables.PROBLEMS)

    def initAlgorithm(self, _configuration=None):  # noqa: N802 - QGIS's name
        p.add(self, p.FAULTS, p.CONTACTS, p.MAP, (p.attitude_error,))

    def prepareAlgorithm(self, parameters, context, _feedback):  # noqa: N802
        from .maps import prepare

        self.inputs = prepare(self, parameters, context)
        return True

    def processAlgorithm(self, parameters, context, feedback):  # noqa: N802
        from . import run
        from .maps import read_map

        with run.stopping():
            data = read_map(self, parameters, context, feedback, self.inputs)
            layers = run.find(data, feedback)
            return run.finish_run(self, parameters, context, feedback, data.frame, layers)
        return {}
