"""From a folder of CSV files to first settings: what is seen, what is guessed, the text that says so."""
