"""What the service keeps: rows in a database, files by their digest."""
