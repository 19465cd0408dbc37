"""POST /v1/in-place-density: what it takes, what is asked, what is told."""
