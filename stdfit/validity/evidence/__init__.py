"""What there is to see of a kit: readings, model, bound and its sources as arrays over frequency."""
