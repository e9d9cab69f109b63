"""One kit for the tests that only look at a finished kit."""

import pytest


@pytest.fixture(scope="session")
def modest_kit(workshop):
    """A kit whose limits end below the last reading, because of the analyser."""
    return workshop(residual_db=38.0).kit()
