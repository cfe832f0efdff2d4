"""From all findings to the files of a site; formats and arranges, computes no statistics."""
