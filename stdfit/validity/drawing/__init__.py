"""From the dimensions of a part to evidence on its parameters."""
