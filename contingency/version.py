"""The version of the tool, as reports and results print it."""

VERSION = "0.1.0"
