"""Soils: texture classes, and what follows from texture and density."""

from models.soil.texture import TEXTURES

__all__ = ["TEXTURES"]
