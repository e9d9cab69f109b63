"""How far a definition can be trusted."""
