"""Pictures as SVG written by hand: the cell, the scan of the tolerance, molecules on their way into the crystal.

They take the page's colours by `currentColor` and the variables --paper and --accent, and look right without them.
"""

from sitesym.views.figures.cell import cell_picture
from sitesym.views.figures.correlation_diagram import correlation_diagram, diagram_key
from sitesym.views.figures.line_spectrum import free_spectrum, line_spectrum
from sitesym.views.figures.molecule import molecule_picture
from sitesym.views.figures.scan import scan_drawing
from sitesym.views.figures.scene import LegendEntry, Picture

__all__ = [
    "LegendEntry", "Picture", "cell_picture", "correlation_diagram", "diagram_key", "free_spectrum", "line_spectrum",
    "molecule_picture", "scan_drawing",
]  # fmt: skip
