"""One module a format; the format is recognised from the content."""
