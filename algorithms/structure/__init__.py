"""Structural geology of offset markers on numpy arrays and shapely geometries; knows nothing of QGIS.

The public names, in the order in which a map goes through them. Conventions stand at the head of `attitudes`.
"""

from .attitudes import (
    azimuth,
    cutoff_direction,
    frame,
    line,
    mean_pole,
    pole,
    rake,
    rake_down,
    slip_vector,
    strike_dip,
    trend_plunge,
)
from .cutoffs import Contacts, Cutoffs, MapRules, find_cutoffs
from .map_accuracy import circular_error_90, position_sd
from .matching import match
from .problems import Cancelled, NothingToSolve, Problem, StructureError
from .senses import rake_note, sense
from .solve import Options, solve_cutoffs
from .terrain import Grid, elevation, gradient
from .traces import FaultLines, Faults, Traces

__all__ = [
    "Cancelled",
    "Contacts",
    "Cutoffs",
    "FaultLines",
    "Faults",
    "Grid",
    "MapRules",
    "NothingToSolve",
    "Options",
    "Problem",
    "StructureError",
    "Traces",
    "azimuth",
    "circular_error_90",
    "cutoff_direction",
    "elevation",
    "find_cutoffs",
    "frame",
    "gradient",
    "line",
    "match",
    "mean_pole",
    "pole",
    "position_sd",
    "rake",
    "rake_down",
    "rake_note",
    "sense",
    "slip_vector",
    "solve_cutoffs",
    "strike_dip",
    "trend_plunge",
]
