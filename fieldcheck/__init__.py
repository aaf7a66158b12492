"""fieldcheck: guided checks of vintage low-voltage AC equipment, with a signed record at the end."""

__version__ = "0.1.0"
