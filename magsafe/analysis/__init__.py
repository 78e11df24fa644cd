"""Floor 3: one design at one frequency: figures with their spread."""
