"""A rule as text: one file per format, reading it back digit for digit, and the shipped tables."""

from simplexcub.table.formats import FORMATS, encode, format_of, render, save
from simplexcub.table.reading import parse, read

__all__ = ["FORMATS", "encode", "format_of", "parse", "read", "render", "save"]
