"""Exports of any layout into gauge records: UTC, metres, flags and a row ledger; stations and network files."""
