"""Sheets: documents composed from a plan or an estimate, set as HTML and as PDF."""
