"""One module a source, named as its record: ``compare(record)`` returns its comparison."""
