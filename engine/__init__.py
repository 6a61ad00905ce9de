"""Wet steam in a line: read by a throttling calorimeter, with its uncertainty.

Five floors, each importing only from the ones below it:
``steam`` < ``calorimeter`` < ``measurement`` < ``job`` < ``screen``.
"""

__version__ = "0.1.0"
