"""Rails: which nets hang together, what feeds them, at which voltage."""
