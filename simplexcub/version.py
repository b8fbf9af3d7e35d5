"""The version of the package, which provenances name."""

VERSION = "0.1.0"
