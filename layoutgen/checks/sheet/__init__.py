"""Direct current in drawn copper: the sheet's potential by finite elements, net by net.

In: a :class:`~layoutgen.checks.board.Board` with a circuit behind it. Out: potentials, sheet currents,
voltage drops (:func:`sheets_of`), and cuts across the current for the rules to judge. The ground's own copper
is not solved.
"""

from layoutgen.checks.sheet.cuts import Cut, cuts
from layoutgen.checks.sheet.mesh import Mesh, mesh_of
from layoutgen.checks.sheet.nets import NetSheet, Sheets, sheets_of
from layoutgen.checks.sheet.solve import Flow, sheet_resistance, solve

__all__ = [
    "Cut",
    "Flow",
    "Mesh",
    "NetSheet",
    "Sheets",
    "cuts",
    "mesh_of",
    "sheet_resistance",
    "sheets_of",
    "solve",
]
