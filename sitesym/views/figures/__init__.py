"""Pictures as SVG written by hand: the cell and the scan of the tolerance.

They take the page's colours by `currentColor` and the variables --paper and --accent, and look right without them.
"""

from sitesym.views.figures.cell import LegendEntry, Picture, cell_picture
from sitesym.views.figures.scan import scan_drawing

__all__ = ["LegendEntry", "Picture", "cell_picture", "scan_drawing"]
