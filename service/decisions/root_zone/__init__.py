"""POST /v1/root-zone: what it takes, what is asked, what is told."""
