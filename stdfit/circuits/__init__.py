"""Physics of one-port standards: arrays in, arrays and derivatives out, SI units throughout."""
