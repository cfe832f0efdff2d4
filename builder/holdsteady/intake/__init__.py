"""From files to readings, with an account of every row."""
