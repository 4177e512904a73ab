"""Plan environmental field sampling from one campaign file; read the site mean at its end."""

__version__ = "0.1.0"
