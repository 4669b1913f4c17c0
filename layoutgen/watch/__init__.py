"""Watching: a circuit file is drawn again whenever it, its rule file or its data files are saved.

In: the path of a circuit file and a folder. Out: the folder's files as pipeline and writers make them,
and the report page on a local address that follows the file by itself and shows the file's faults while it is
wrong. Only this machine can reach the address. Nothing here sizes, draws or writes in a way of its own.
Needs the libraries of the extra ``watch``.
"""

from layoutgen.watch.files import watched_files
from layoutgen.watch.redraw import Draw, Drawing, redraw
from layoutgen.watch.watch import watch

__all__ = ["Draw", "Drawing", "redraw", "watch", "watched_files"]
