"""What the host program needs besides the BOM script: a jobset, and a package for its content manager."""
