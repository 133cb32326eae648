"""Folios, manifests, the audit trail, the environment record and numbered checks."""
