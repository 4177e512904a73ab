"""Words and tools that every room shares: errors, working, documents, files, draws."""
