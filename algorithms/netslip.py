"""The main job: net slip of every fault of a digitized map."""

from . import parameters as p
from . import tables
from .base import Algorithm


class NetSlip(Algorithm):
    """How far and which way each fault really moved, from the markers that it cuts.

    Finds where each contact ends against each fault, extends both walls' cutoff lines in the fault plane to where they
    cross (the piercing points), and measures the slip between them, with intervals from the errors of attitudes and
    positions. Two markers of different attitude give the slip; three or more are fitted by weighted least squares; one
    marker needs slickenlines; one alone gives separations only.

    Whatever cannot be matched one to one is left out and listed among the problems, with its reason and place.
    """

    ID = "netslip"
    TITLE = "Net slip from offset markers"
    TAGS = ("fault", "slip", "offset", "separation", "throw", "heave", "rake", "piercing point", "cutoff", "marker", "dike")
    OUTPUTS = tables.ALL_TABLES

    def initAlgorithm(self, _configuration=None):  # noqa: N802 - QGIS's name
        p.add(self, p.FAULTS, p.CONTACTS, p.MAP, p.SOLVING)

    def prepareAlgorithm(self, parameters, context, _feedback):  # noqa: N802
        from .maps import prepare

        self.inputs = prepare(self, parameters, context)
        return True

    def processAlgorithm(self, parameters, context, feedback):  # noqa: N802
        from . import run
        from .maps import read_map

        steps = run.stages(feedback, 3)
        data = read_map(self, parameters, context, steps, self.inputs)
        choices = run.options(self, parameters, context)
        with run.stopping():
            steps.setCurrentStep(1)
            faults, cutoffs, problems = run.cutoffs_of_map(data, steps)
            steps.setCurrentStep(2)
            length = run.length_on_map(data.rules.search)
            layers = run.solve(data, faults, cutoffs, problems, choices, length, steps)
            return run.finish_run(self, parameters, context, feedback, data.frame, layers)
        return {}
