"""Formulas of the electronics: pure functions in base SI units, each with its source.

One module a subject: :mod:`~modgen.formulas.glide`, :mod:`~modgen.formulas.pitch`,
:mod:`~modgen.formulas.loading`, :mod:`~modgen.formulas.leakage`, :mod:`~modgen.formulas.amplifier`,
:mod:`~modgen.formulas.supply`, :mod:`~modgen.formulas.tolerance`, :mod:`~modgen.formulas.series`,
:mod:`~modgen.formulas.land_pattern`, :mod:`~modgen.formulas.stability`, :mod:`~modgen.formulas.noise`,
:mod:`~modgen.formulas.shorts`.
"""
