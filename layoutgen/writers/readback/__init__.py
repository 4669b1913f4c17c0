"""Readers for the proof that written files hold the model, one kind of file each.

In: a file's name and bytes, and the result it was written from. Out: for each question a :class:`Check` or,
where nothing here can answer it, a :class:`NotProved`. Wherever an independent library is installed, it does
the reading; what it finds is compared with the shapes of the model, never with another file.
"""

from layoutgen.writers.readback.records import Check, NotProved, Proof

__all__ = ["Check", "NotProved", "Proof"]
