"""Every source of error, pushed through the fit."""
