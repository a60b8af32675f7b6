"""The charts of the screen: rim, response and spectrum on one frequency axis, drawn on Textual's line API.

Every module but `chart`, `rim`, `response` and `spectrum` (the four with widgets) draws without Textual's widgets,
from plain data into a `Raster`. This file imports nothing, so that the screen can paint before numpy is loaded.
"""
