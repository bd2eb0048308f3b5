"""Review of finite-field group parameters: structure, exposure, criteria, report."""

__version__ = "0.1.0"
