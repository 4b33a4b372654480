"""The report: wording, charts, pages, PDF.  Computes no figure."""
