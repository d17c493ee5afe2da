"""Pictures as SVG written by hand: the cell, the scan of the tolerance, molecules on their way into the crystal.

They take the page's colours by `currentColor` and the variables --paper and --accent, and look right without them.
"""

from sitesym.views.figures.cell import LegendEntry, Picture, cell_picture
from sitesym.views.figures.correlation_diagram import correlation_diagram, diagram_key
from sitesym.views.figures.line_spectrum import line_spectrum
from sitesym.views.figures.scan import scan_drawing

__all__ = [
    "LegendEntry", "Picture", "cell_picture", "correlation_diagram", "diagram_key", "line_spectrum", "scan_drawing",
]  # fmt: skip
