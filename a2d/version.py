"""The version, read by pyproject.toml too: asking the installed package for it costs a tenth of a conversion."""

VERSION = "0.1.0"
