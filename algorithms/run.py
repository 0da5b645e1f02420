"""The steps that the slip algorithms share, between reading and writing."""

from contextlib import suppress

import numpy as np
from qgis.core import QgsProcessingException, QgsProcessingMultiStepFeedback

from . import parameters as p
from .outputs import cutoff_layer, problem_layer, solution_layers
from .structure import Cancelled, NothingToSolve, Options, find_cutoffs, match, solve_cutoffs
from .structure.unsolved import unsolved_problems
from .writing import write_layers

CUTOFF_LENGTH_ON_MAP = 0.008  # metres on the map of a cutoff line without a piercing point
SHOWN = 50  # problems written out in the log


def stopping():
    """Context in which a stop by the user ends the work quietly; what follows returns no results."""
    return suppress(Cancelled)


def reporter(feedback):
    """The computing room's `report`: shows progress, raises `Cancelled` when the user stops the run."""

    def report(fraction):
        feedback.setProgress(100.0 * fraction)
        if feedback.isCanceled():
            raise Cancelled

    return report


def options(algorithm, parameters, context):
    """Solving options from the parameters."""

    def number(name):
        return algorithm.parameterAsDouble(parameters, name, context)

    def choice(name):
        return algorithm.parameterAsEnumString(parameters, name, context)

    return Options(
        fault_error=number("ATTITUDE_ERROR"),
        rake_error=number("LINEATION_ERROR"),
        samples=algorithm.parameterAsInt(parameters, "SAMPLES", context),
        seed=algorithm.parameterAsInt(parameters, "SEED", context),
        pairs=choice("SOLVE_FOR") == p.PAIRS,
        per_block=choice("BLOCK_ATTITUDES") == p.PER_BLOCK,
    )


def fault_places(faults, cutoffs):
    """Middle of each fault's cutoffs, ``(f, 2)``; the middle of all for a fault without any."""
    count = np.bincount(cutoffs.fault, minlength=len(faults.name))[:, None]
    total = np.zeros((len(faults.name), 2))
    np.add.at(total, cutoffs.fault, cutoffs.xyz[:, :2])
    return np.where(count > 0, total / np.maximum(count, 1), cutoffs.xyz[:, :2].mean(axis=0))


def turns(frame, faults, cutoffs):
    """Degrees to add to the frame's grid azimuths at each fault, for true north and for the map's own grid."""
    to_true = -frame.true_north(fault_places(faults, cutoffs))
    own_grid = frame.crs == frame.map_crs
    return to_true, np.zeros(len(to_true)) if own_grid else to_true


def cutoffs_of_map(data, feedback):
    """Faults and cutoffs of a map, with all problems so far."""
    faults, _, cutoffs, problems = find_cutoffs(
        data.fault_lines, data.contacts, data.rules, data.ground, reporter(feedback)
    )
    return faults, cutoffs, data.problems + problems


def say(feedback, problems):
    """Write what was left out to the log, the first ones in full."""
    for problem in problems[:SHOWN]:
        who = ", ".join(text for text in (problem.fault and f"fault {problem.fault}", problem.marker) if text)
        feedback.pushWarning(f"{who}: {problem.reason} - {problem.advice}" if who else problem.reason)
    if len(problems) > SHOWN:
        feedback.pushWarning(f"... and {len(problems) - SHOWN} more: see the layer of problems")


def find(data, feedback):
    """Layers of findcutoffs.

    Raises QgsProcessingException when there is no cutoff at all.
    """
    faults, cutoffs, problems = cutoffs_of_map(data, feedback)
    if not len(cutoffs.fault):
        say(feedback, problems)
        raise QgsProcessingException(nothing(NothingToSolve("no contact ends on any fault"), problems))
    _, state, unmatched = match(cutoffs, faults)
    problems += unmatched
    say(feedback, problems)
    to_true, _ = turns(data.frame, faults, cutoffs)
    lines = cutoff_layer(faults, cutoffs, state, length_on_map(data.rules.search), to_true)
    return [lines, problem_layer(problems, data.fault_rows, data.contact_rows)]


def length_on_map(search):
    """Length in metres of a cutoff line without a piercing point; the search distance is a millimetre on the map."""
    return CUTOFF_LENGTH_ON_MAP * 1000.0 * search


def solve(data, faults, cutoffs, problems, choices, length, feedback):
    """All layers of a solution from a cutoff table.

    Raises QgsProcessingException when no fault can be solved.
    """
    try:
        solved, state, unmatched = solve_cutoffs(faults, cutoffs, choices, reporter(feedback))
    except NothingToSolve as error:
        say(feedback, problems + match(cutoffs, faults)[2])
        raise QgsProcessingException(nothing(error, problems)) from error
    problems = problems + unmatched + unsolved_problems(solved, faults, cutoffs)
    say(feedback, problems)
    layers = solution_layers(
        solved, faults, cutoffs, state, length, data.ground, turns(data.frame, faults, cutoffs)
    )
    return [*layers, problem_layer(problems, data.fault_rows, data.contact_rows)]


def nothing(error, problems):
    """One clear sentence for a run that solves nothing."""
    others = f"; {len(problems)} other problems are in the log" if problems else ""
    return f"Nothing to solve: {error}{others}."


def stages(feedback, count):
    """Progress shared by several steps."""
    return QgsProcessingMultiStepFeedback(count, feedback)


def finish_run(algorithm, parameters, context, feedback, frame, layers):
    """Write the layers and return QGIS's results: ids of layers, and the count of problems."""
    results = write_layers(algorithm, parameters, context, feedback, frame, layers)
    for layer in layers:
        feedback.pushInfo(f"{layer.table.title}: {len(layer.geometry)}")
    return results
