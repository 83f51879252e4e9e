"""The reading sheet as a part, for the command line."""

from .expected import readings_part as readings_part
