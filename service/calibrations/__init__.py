"""POST /v1/calibrations: pairs checked and brought to SI, the answer laid out."""
