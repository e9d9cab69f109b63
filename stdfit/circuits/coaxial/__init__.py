"""Full-wave fields of coaxial lines and their ends: dimensions in, capacitance over frequency out, SI units."""
