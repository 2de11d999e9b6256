"""The first stage: from a sheet's text to its circuits and claims."""
