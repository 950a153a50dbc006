"""Rateloom: from finished quantum-chemistry calculations to an audited table of rate coefficients."""

__version__ = "0.1.0"
