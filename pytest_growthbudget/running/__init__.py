"""One run of pytest: what ties the rooms together for a budgeted test, and what the run keeps."""
