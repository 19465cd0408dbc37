"""POST /v1/waveforms: what it takes, what it asks of the models, what it answers."""
