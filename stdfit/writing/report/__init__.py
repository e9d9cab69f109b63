"""A kit as one page for a browser: the answer first, then what to type, how sure, what to do, and all evidence."""
