"""Published formulas: floats or arrays in, arrays out; they know nothing of circuits, boards or files.

Each function is named by author and year where published, and states source, range and measured accuracy.
Lengths are in units of the substrate height where the papers do so (``u = W/h``, ``t = t/h``, gaps in h,
``math.inf`` for no pour), otherwise SI. Results of models carry ``in_range``.

>>> from layoutgen.formulas.microstrip import hammerstad_jensen_1980
>>> round(float(hammerstad_jensen_1980(1.0, 9.8).impedance), 2)
49.29
"""
