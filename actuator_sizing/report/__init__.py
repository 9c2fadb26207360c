"""Writers: one per format, all fed the same comparison; no number is born here."""
