"""Words everybody uses: read-only arrays, the error tree, sweeps."""
