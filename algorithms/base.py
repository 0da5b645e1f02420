"""What every algorithm of the plugin shares: its description from class attributes, its help written once.

A subclass states ID, TITLE, TAGS and OUTPUTS (a tuple of `tables.Table`), writes its help as its docstring, and
overrides initAlgorithm and processAlgorithm as any QGIS algorithm does.
"""

import inspect

from qgis.core import QgsProcessingAlgorithm, QgsProcessingParameterDefinition
from qgis.PyQt.QtCore import QCoreApplication

from ..plugin.requirements import missing_requirement

CAUTION = (
    "Results depend on marker correlation and measured attitudes. They are no hazard, ground-control or excavation "
    "assessment: where safety is concerned, local codes and a licensed practitioner decide."
)


def tr(text):
    """The text in the user's language."""
    return QCoreApplication.translate("FaultNetSlip", text)


def advanced(parameter):
    """The parameter, shown among the advanced ones."""
    parameter.setFlags(parameter.flags() | QgsProcessingParameterDefinition.Flag.FlagAdvanced)
    return parameter


class Described:
    """Answers QGIS's questions about an algorithm from its class attributes and docstring."""

    ID = TITLE = ""
    GROUP = ("slip", "Net slip")
    TAGS = ()
    OUTPUTS = ()

    def name(self):
        return self.ID

    def displayName(self):  # noqa: N802 - QGIS's name
        return tr(self.TITLE)

    def groupId(self):  # noqa: N802
        return self.GROUP[0]

    def group(self):
        return tr(self.GROUP[1])

    def tags(self):
        return [tr(tag) for tag in self.TAGS]

    def createInstance(self):  # noqa: N802
        return type(self)()

    def shortDescription(self):  # noqa: N802
        return tr(_paragraphs(self)[0])

    def shortHelpString(self):  # noqa: N802
        """The docstring, each parameter's help, each output's columns, the caution."""
        parts = [f"<p>{tr(text)}</p>" for text in _paragraphs(self)]
        parts += [_entry(p.description(), [p.help()]) for p in self.parameterDefinitions() if p.help()]
        for table in self.OUTPUTS:
            parts.append(_entry(table.title, [f"<b>{c.name}</b>: {c.help}" for c in table.columns]))
        return "".join(parts) + f"<p><i>{tr(CAUTION)}</i></p>"

    def canExecute(self):  # noqa: N802
        lacking = missing_requirement()
        return not lacking, lacking

    def checkParameterValues(self, parameters, context):  # noqa: N802
        """As QGIS does, and what canExecute says: only the toolbox asks that one."""
        lacking = missing_requirement()
        if lacking:
            return False, lacking
        return super().checkParameterValues(parameters, context)


def _paragraphs(algorithm):
    return [" ".join(text.split()) for text in inspect.getdoc(type(algorithm)).split("\n\n")]


def _entry(title, lines):
    return f"<h3>{tr(title)}</h3><p>{'<br>'.join(tr(line) for line in lines)}</p>"


class Algorithm(Described, QgsProcessingAlgorithm):
    """An algorithm that reads whole layers and writes new ones."""
