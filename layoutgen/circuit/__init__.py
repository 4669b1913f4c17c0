"""Third stage: what the schematic means.

In: a circuit file and its rule file, both read and checked. Out: a :class:`Circuit` with every net and the
ends that meet in it, the banks of shunt parts in the order their feed meets them, the bias point, the path
that is drawn straight (the spine), and the independent loops. It sizes nothing and places nothing; the
bias point it finds assumes equal lines until sizing knows their widths.
"""

from layoutgen.circuit.build import build_circuit, with_dc
from layoutgen.circuit.dc import conductor_keys, nominal_resistances, solve_dc
from layoutgen.circuit.queries import (
    GROUND,
    OPEN,
    element_key,
    elements,
    ends_of,
    is_device_pin,
    is_shunt,
    is_supply,
    lines_at,
    net_of,
    other_end,
    two_nets,
)
from layoutgen.circuit.records import (
    Circuit,
    DcSolution,
    End,
    EndKind,
    Net,
)

__all__ = [
    "GROUND",
    "OPEN",
    "Circuit",
    "DcSolution",
    "End",
    "EndKind",
    "Net",
    "build_circuit",
    "conductor_keys",
    "element_key",
    "elements",
    "ends_of",
    "is_device_pin",
    "is_shunt",
    "is_supply",
    "lines_at",
    "net_of",
    "nominal_resistances",
    "other_end",
    "solve_dc",
    "two_nets",
    "with_dc",
]
