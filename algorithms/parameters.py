"""Shared parameters: the same name, label, bounds and help in every algorithm that has them.

Factories, not objects: QGIS deletes a parameter with the first algorithm instance that owns it. A bundle is a tuple of
factories; `add` gives an algorithm those it lists. Enumerations take static strings, which are public.
"""

from qgis.core import (
    QgsProcessing,
    QgsProcessingParameterDistance,
    QgsProcessingParameterEnum,
    QgsProcessingParameterFeatureSource,
    QgsProcessingParameterField,
    QgsProcessingParameterMultipleLayers,
    QgsProcessingParameterNumber,
    QgsProcessingParameterRasterLayer,
    QgsProcessingParameterScale,
    QgsProcessingParameterFeatureSink,
    QgsWkbTypes,
)

from .base import advanced, tr

LINES = [QgsProcessing.SourceType.TypeVectorLine]
REAL = QgsProcessingParameterNumber.Type.Double
WHOLE = QgsProcessingParameterNumber.Type.Integer
STRIKE, DIP_AZIMUTH = "strike", "dip_azimuth"
TRUE_NORTH, GRID_NORTH = "true", "grid"
LEAVE_OUT, USE = "leave_out", "use"
FAULT, PAIRS = "fault", "pairs"
SHARED, PER_BLOCK = "shared", "per_block"


def _with_help(parameter, text):
    parameter.setHelp(tr(text))
    return parameter


def _field(name, label, parent, default, text):
    """An optional field; its default is used only by layers that have it."""
    kind = QgsProcessingParameterField.DataType.Any
    return _with_help(QgsProcessingParameterField(name, tr(label), default, parent, kind, False, True), text)


def _number(name, label, default, low, high, text, kind=REAL, optional=False):
    parameter = QgsProcessingParameterNumber(name, tr(label), kind, default, optional, low, high)
    return _with_help(parameter, text)


def _choice(name, label, options, text):
    """A choice of static strings, the first by default."""
    parameter = QgsProcessingParameterEnum(name, tr(label), list(options), False, options[0], False, True)
    return _with_help(parameter, text)


def faults():
    return _with_help(
        QgsProcessingParameterFeatureSource("FAULTS", tr("Fault traces"), LINES),
        "Fault traces. Pieces that touch are one trace; all traces of one name are one fault.",
    )


def fault_name():
    return _field("FAULT_NAME", "Fault name field", "FAULTS", "name", "Name of the fault; else the feature id.")


def fault_azimuth():
    text = (
        "Azimuth of the fault, degrees. Without it: the trace's overall direction, digitised with the dip to the right."
    )
    return _field("FAULT_AZIMUTH", "Fault azimuth field", "FAULTS", "strike", text)


def fault_dip():
    return _field("FAULT_DIP", "Fault dip field", "FAULTS", "dip", "Dip of the fault, 0-90 degrees.")


def lineation_rake():
    text = "Rake of slickenlines, 0-180 degrees down from the strike (right-hand rule); solves a fault with one marker."
    return _field("LINEATION_RAKE", "Slickenline rake field", "FAULTS", "rake", text)


def assumed_dip():
    return _number("ASSUMED_DIP", "Dip of faults without one (degrees)", 60.0, 1.0, 90.0, "For faults without a dip.")


def assumed_dip_error():
    text = "Half the width of the uniform spread given to an assumed dip."
    return advanced(_number("ASSUMED_DIP_ERROR", "Error of an assumed dip (degrees)", 15.0, 0.0, 45.0, text))


def contacts():
    parameter = QgsProcessingParameterMultipleLayers(
        "CONTACTS", tr("Contacts of markers"), QgsProcessing.SourceType.TypeVectorLine
    )
    return _with_help(parameter, "Contacts of beds, dikes, veins that the faults cut; one layer or several.")


def marker():
    text = "Which contacts are the same marker; else the layer's name."
    return _field("MARKER", "Marker field", "CONTACTS", "marker", text)


def contact_azimuth():
    text = "Azimuth of the marker, degrees; numbers or text like '045'."
    return _field("CONTACT_AZIMUTH", "Marker azimuth field", "CONTACTS", "strike", text)


def contact_dip():
    text = "Dip of the marker, 0-90 degrees. A marker without an attitude gets its strike separation only."
    return _field("CONTACT_DIP", "Marker dip field", "CONTACTS", "dip", text)


def contact_error():
    text = "Angular error of the marker's attitude, degrees; else the attitude error below."
    return advanced(_field("CONTACT_ERROR", "Marker attitude error field", "CONTACTS", "att_error", text))


def azimuth_is():
    text = "What the azimuth fields hold: 'strike' by the right-hand rule (dip to the right), or the azimuth of the dip."
    return _choice("AZIMUTH_IS", "Azimuths are", (STRIKE, DIP_AZIMUTH), text)


def north():
    text = "What azimuths are measured from. Results are always given from true north."
    return advanced(_choice("NORTH", "Azimuths are from north", (TRUE_NORTH, GRID_NORTH), text))


def elevation():
    parameter = QgsProcessingParameterRasterLayer("ELEVATION", tr("Ground elevation"), None, True)
    return _with_help(parameter, "Elevation of the ground; else the geometry's Z; else level ground at 0.")


def z_factor():
    text = "Metres per unit of the elevation: 0.3048 for feet."
    return advanced(_number("Z_FACTOR", "Elevation unit (metres)", 1.0, 1e-6, 1e6, text))


def _map_distance(name, label, default, text, optional):
    parameter = QgsProcessingParameterDistance(name, tr(label), default, "FAULTS", optional, 0.0)
    return _with_help(parameter, text)


def search_distance():
    text = "How far short of a fault a contact may stop, in the units of the fault layer. Empty: 1 mm at the map scale."
    return _map_distance("SEARCH_DISTANCE", "Search distance", None, text, True)


def join_gaps():
    text = "Longest covered gap to bridge between pieces of one fault that lie in line. 0: only pieces that touch."
    return advanced(_map_distance("JOIN_GAPS", "Join gaps up to", 0.0, text, True))


def uncut():
    text = "Contacts drawn unbroken across a fault: left out and reported, or used as markers without separation."
    return advanced(_choice("UNCUT", "Uncut contacts", (LEAVE_OUT, USE), text))


def map_scale():
    text = "Scale the map was drawn at: sets the position errors (U.S. National Map Accuracy Standards) and distances."
    return _with_help(QgsProcessingParameterScale("MAP_SCALE", tr("Map scale"), 25000), text)


def position_error():
    text = "Standard deviation of easting and of northing, metres. Empty: from the map scale."
    return advanced(_number("POSITION_ERROR", "Position error (metres)", None, 0.0, 1e6, text, optional=True))


def position_error_field():
    text = "Position error of each contact, metres, where it is known; else the position error for all."
    return advanced(_field("CONTACT_POSITION_ERROR", "Position error field", "CONTACTS", "pos_error", text))


def attitude_error():
    text = "Angular error of the poles of faults and markers, degrees, one standard deviation in each direction."
    return _number("ATTITUDE_ERROR", "Attitude error (degrees)", 2.0, 0.0, 30.0, text)


def lineation_error():
    text = "Standard deviation of the rake of slickenlines, degrees."
    return advanced(_number("LINEATION_ERROR", "Slickenline rake error (degrees)", 5.0, 0.0, 45.0, text))


def samples():
    text = "Monte Carlo samples for each solution. 0: no intervals."
    return advanced(_number("SAMPLES", "Samples", 1000, 0, 1_000_000, text, WHOLE))


def seed():
    text = "The same seed gives the same intervals again."
    return advanced(_number("SEED", "Seed", 1, 0, 2_147_483_647, text, WHOLE))


def solve_for():
    text = "One solution for each fault from all its markers, or one for each pair of neighbouring markers along it."
    return advanced(_choice("SOLVE_FOR", "One solution for each", (FAULT, PAIRS), text))


def block_attitudes():
    text = "'shared': one attitude for each marker, pooled from both blocks. 'per_block': each block its own (rotation)."
    return advanced(_choice("BLOCK_ATTITUDES", "Attitudes of the blocks", (SHARED, PER_BLOCK), text))


FAULTS = (faults, fault_name, fault_azimuth, fault_dip)
CONTACTS = (contacts, marker, contact_azimuth, contact_dip)
MAP = (
    elevation,
    map_scale,
    search_distance,
    azimuth_is,
    north,
    z_factor,
    join_gaps,
    uncut,
    assumed_dip,
    assumed_dip_error,
    lineation_rake,
    contact_error,
    position_error,
    position_error_field,
)
SOLVING = (attitude_error, lineation_error, solve_for, block_attitudes, samples, seed)


def sink(table, default=True):
    """The output parameter of a table; one that is not created by default is optional."""
    geometry = {
        QgsWkbTypes.Type.LineStringZ: QgsProcessing.SourceType.TypeVectorLine,
        QgsWkbTypes.Type.PointZ: QgsProcessing.SourceType.TypeVectorPoint,
        QgsWkbTypes.Type.Polygon: QgsProcessing.SourceType.TypeVectorPolygon,
    }[table.geometry]
    return QgsProcessingParameterFeatureSink(table.output, tr(table.title), geometry, None, True, default)


def add(algorithm, *bundles):
    """Give an algorithm the parameters of some bundles, then its outputs."""
    for bundle in bundles:
        for factory in bundle:
            algorithm.addParameter(factory())
    for table in algorithm.OUTPUTS:
        algorithm.addParameter(sink(table))
