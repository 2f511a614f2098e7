"""From results to documents (JSON), and from documents to text, CSV, Markdown and LaTeX."""
