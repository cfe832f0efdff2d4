"""Published statistics of control charts: arrays in, frozen results out; knows no files, tables or pages."""
