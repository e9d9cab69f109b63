"""What to type where only part of a definition is accepted."""
