"""holdsteady: from a folder of measurement files to a site that tells which processes signal."""

__version__ = "0.1.0"
