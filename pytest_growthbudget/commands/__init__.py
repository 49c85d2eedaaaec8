"""Commands for a terminal that read files: judge, trend, accept, page."""
