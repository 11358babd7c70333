"""Plant options at one site: each computed as fully as an estimate, and held against each other."""
