"""Schemes: how the aggregation equation becomes ordinary differential equations on a size grid."""

from aggsim.schemes.base import BEYOND as BEYOND
from aggsim.schemes.base import Operator as Operator
from aggsim.schemes.base import Prepared as Prepared
from aggsim.schemes.base import Scheme as Scheme
from aggsim.schemes.cells import CellAverage as CellAverage
from aggsim.schemes.cells import FiniteVolume as FiniteVolume
from aggsim.schemes.fixed_pivot import FixedPivot as FixedPivot
from aggsim.schemes.monomer import Monomer as Monomer
from aggsim.schemes.sectional import Sectional as Sectional
