"""A store as lines, and a store from lines: backups of either database, moves between them."""
