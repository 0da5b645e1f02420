"""Position error of a printed or digitized map from its scale.

Sources: United States National Map Accuracy Standards (Bureau of the Budget, revised 17 June 1947): not more than
10 percent of the points tested in error by more than 1/30 inch at publication scales larger than 1:20,000, 1/50
inch at 1:20,000 or smaller. FGDC-STD-007.3-1998, part 3, appendix 3-A: circular error at 90 % = 2.1460 standard
deviations of each coordinate.
"""

import numpy as np

INCH_m = 0.0254
CIRCULAR_90 = 2.1460
LARGEST_SMALL_SCALE = 20_000


def circular_error_90(scale_denominator):
    """Radius in metres on the ground that holds 90 % of well-defined points."""
    scale = np.asarray(scale_denominator, float)
    return np.where(scale < LARGEST_SMALL_SCALE, INCH_m / 30, INCH_m / 50) * scale


def position_sd(scale_denominator):
    """Standard deviation in metres of easting and of northing, each."""
    return circular_error_90(scale_denominator) / CIRCULAR_90
