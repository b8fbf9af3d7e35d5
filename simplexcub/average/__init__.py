"""Applying rules: means of functions of a spectrum, with what is known about their error."""
