"""Soil dielectric science: arrays in, arrays out, no web, no files.

Time dependence is exp(+j w t), so a lossy permittivity is eps' - j eps'' with eps'' >= 0,
and roots and powers of it are the principal ones. Temperatures are degrees Celsius;
everything else is SI. NaN means "no number".
"""
