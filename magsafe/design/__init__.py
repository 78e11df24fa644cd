"""Floor 2: what the user described, read from one file, validated, in SI units."""
