"""tonebench: a terminal bench for second-order filter chains."""

__version__ = "0.1.0"
