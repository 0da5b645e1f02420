"""Whether the libraries that the algorithms need are there; asked only when an algorithm is about to run."""

from importlib import import_module

HOW = (
    "Install it into the Python that QGIS uses: on Linux 'python3 -m pip install --user \"shapely>=2\"', on Windows the "
    "same in the OSGeo4W shell, on macOS with the python3 inside the QGIS application; then start QGIS again."
)


def missing_requirement():
    """What is missing and how to install it, or '' when all is there.

    A version number is not asked for, since some distributions write none: what tells is whether shapely works on arrays.
    """
    try:
        import_module("numpy")
    except ImportError:
        return f"Fault Net Slip needs numpy, which is not installed. {HOW.replace('shapely>=2', 'numpy')}"
    try:
        shapely = import_module("shapely")
    except ImportError:
        return f"Fault Net Slip needs shapely 2 or later, which is not installed. {HOW}"
    if not hasattr(shapely, "from_wkb"):
        return f"Fault Net Slip needs shapely 2 or later; this one is older. {HOW}"
    return ""
