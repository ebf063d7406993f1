"""Prose in the repository: what stands in Markdown, notebooks, LaTeX and reStructuredText, and what it links to."""
