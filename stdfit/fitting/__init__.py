"""From readings to parameters: the problem, its starting values and the only door to lmfit."""
