"""What people hold: point files, maps, sheets, forms, and the folder they come in."""
