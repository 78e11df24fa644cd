"""Floor 6: commands. Each reads a file, calls one function and prints."""
