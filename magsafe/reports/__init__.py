"""Floor 5: a sheet in, a document out. Nothing is computed here beyond formatting."""
