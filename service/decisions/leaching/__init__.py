"""POST /v1/leaching: what it takes, what is asked, what is told."""
