"""What the user wrote: settings, logbook, limits register."""
