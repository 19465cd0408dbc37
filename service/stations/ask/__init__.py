"""Questions about what is kept: taken apart, worked out, laid out as tables and charts."""
