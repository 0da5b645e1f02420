"""Names of slip: sense, rake in words, compass quadrants."""

import numpy as np

VERTICAL = 89.5  # degrees; steeper than a compass can tell from vertical
PURE = 22.5  # degrees of rake within which a slip is called by one component alone

_EIGHT = np.array(["north", "northeast", "east", "southeast", "south", "southwest", "west", "northwest"])
_LETTERS = np.array(["N", "NE", "E", "SE", "S", "SW", "W", "NW"])


def _octant(azimuth):
    azimuth = np.nan_to_num(np.asarray(azimuth, float))
    return (np.round(azimuth / 45.0).astype(int)) % 8


def compass_letters(azimuth):
    """'N', 'NE' ... of azimuths in degrees."""
    return _LETTERS[_octant(azimuth)]


def named_components(rake):
    """Which components give the slip its name: two boolean arrays, dip slip and strike slip.

    A slip within 22.5 degrees of pure is called by that component alone, else by both.
    """
    steepness = np.degrees(np.arctan2(np.abs(np.sin(np.radians(rake))), np.abs(np.cos(np.radians(rake)))))
    return steepness >= PURE, steepness <= 90 - PURE


def sense(rake, strike, dip):
    """Sense of slip in words, an array of text: 'reverse', 'normal-dextral', 'sinistral, east block down'.

    The rake is Aki & Richards'. A vertical fault has no hanging wall, so its dip slip is told by the block that
    went down: the one on the right-hand side of the strike for a negative rake.
    """
    rake, strike, dip = np.broadcast_arrays(np.asarray(rake, float), strike, dip)
    by_dip, by_strike = named_components(rake)
    along = np.where(np.abs(rake) < 90, "sinistral", "dextral")
    down = np.where(rake < 0, "normal", "reverse")
    side = _EIGHT[_octant(np.asarray(strike) + np.where(rake < 0, 90, 270))]
    blocks = np.char.add(side, " block down")
    inclined = np.where(by_dip & by_strike, np.char.add(np.char.add(down, "-"), along), np.where(by_dip, down, along))
    vertical = np.where(
        by_dip & by_strike, np.char.add(np.char.add(along, ", "), blocks), np.where(by_dip, blocks, along)
    )
    words = np.where(np.asarray(dip) >= VERTICAL, vertical, inclined)
    return np.where(np.isnan(rake), "", words)


def apparent_sense(strike_separation, dip_separation, strike, dip):
    """Sense in words of separations (positive sinistral, positive normal; nan: none), in the style of `sense`."""
    along, down = np.sign(np.nan_to_num(strike_separation)), np.sign(np.nan_to_num(dip_separation))
    rake = np.where((along == 0) & (down == 0), np.nan, np.degrees(np.arctan2(-down, along)))
    return sense(rake, strike, dip)


def rake_note(rake, strike):
    """Rake as field geologists write it: acute angle from the strike and the strike's end, '41 NW'."""
    rake, strike = np.broadcast_arrays(np.asarray(rake, float), np.asarray(strike, float))
    down = np.nan_to_num(-rake) % 180.0  # Aki & Richards turn counter-clockwise, this one runs down from the strike
    acute = np.round(np.where(down > 90, 180 - down, down)).astype(int)
    end = compass_letters(strike + np.where(down > 90, 180, 0))
    note = np.char.add(np.char.add(acute.astype(str), " "), end)
    return np.where(np.isnan(rake), "", note)
