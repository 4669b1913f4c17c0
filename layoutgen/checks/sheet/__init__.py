"""Direct current in drawn copper: the sheet's potential by finite elements, net by net.

In: a :class:`~layoutgen.checks.board.Board` with a circuit behind it. Out: potentials, sheet currents,
voltage drops (:func:`sheets_of`), and cuts across the current for the rules to judge. The ground's own copper
is not solved.

How good: with the mesh that the rules use, uniform strips are exact, a right-angle corner has 0.5568 squares
(conformal mapping: 1 - 2 ln 2 / pi = 0.5587, so 0.34 % low), tapers are within 0.01 % and two discs within
0.05 % of their closed forms; twice as fine (``fineness=2``) the corner is 0.04 % low.
"""

from layoutgen.checks.sheet.cuts import Cut, cuts
from layoutgen.checks.sheet.mesh import Mesh, mesh_of
from layoutgen.checks.sheet.nets import NetSheet, Sheets, sheets_of
from layoutgen.checks.sheet.resistance import sheet_resistance
from layoutgen.checks.sheet.solve import Flow, solve

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
