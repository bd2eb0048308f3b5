"""Attack routes: pure functions from plain numbers to work factors, one file a route.

A route knows nothing of facts, claims or declarations: it takes lengths, widths, factorizations
as far as known (:mod:`auditor.routes.factors`) and the checks that are made, and returns
:class:`auditor.routes.base.Work`, or :class:`auditor.routes.base.Closed` with the reason.
"""
