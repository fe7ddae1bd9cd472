"""specflow: requirements-to-verification traceability for RF specifications."""

__version__ = "0.1.0"
