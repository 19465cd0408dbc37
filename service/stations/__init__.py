"""Stations: what is installed where and when, what loggers post, what dashboards ask."""
