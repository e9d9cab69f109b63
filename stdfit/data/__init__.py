"""From files to sound records: readings become sweeps, bench files become benches."""
