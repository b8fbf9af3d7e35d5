"""A rule as text: one file per format, reading it back digit for digit, and the shipped tables."""

from simplexcub.table.formats import FORMATS, encode, format_of, render, save
from simplexcub.table.reading import parse, read
from simplexcub.table.shipped import Shipped, catalogue, load

__all__ = ["FORMATS", "Shipped", "catalogue", "encode", "format_of", "load", "parse", "read", "render", "save"]
