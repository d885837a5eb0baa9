"""settlelab: settling tests from recording to signed report."""

__version__ = "0.1.0"
