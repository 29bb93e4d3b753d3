"""What leaves the program: figures, tables, and files that hold a result."""

from aggsim.outputs import figures as figures
from aggsim.outputs import tables as tables
from aggsim.outputs.archive import load as load
from aggsim.outputs.archive import save as save
