"""Distributions, dependence, draws, percentiles, rounding: arrays in, arrays out."""
