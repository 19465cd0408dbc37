"""JSON documents and lines: what they hold, and what is answered."""
