"""The report: a neutral document made from a `Result`, and the writers that lay it out."""
