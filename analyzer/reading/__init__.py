"""Reading: files become a Circuit. Only this room and `output` touch files."""
