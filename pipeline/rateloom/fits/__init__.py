"""Expressions fitted to rate coefficients over a temperature grid.

Takes temperatures and ln k, gives the terms of an expression, how well it holds and what there is to remark. A form
is a file here and a line in its table. Rate coefficients are left to ``rates``, their units in tables to ``output``.
"""

from rateloom.fits.fit import FORMS, fit_rates
from rateloom.fits.form import Fit, Form, Term, activation_energy, log_rate

__all__ = ["FORMS", "Fit", "Form", "Term", "activation_energy", "fit_rates", "log_rate"]
