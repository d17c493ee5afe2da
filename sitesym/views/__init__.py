"""Views of the results: text, HTML, JSON, CSV, Markdown, LaTeX. They show what a result holds and compute nothing."""
