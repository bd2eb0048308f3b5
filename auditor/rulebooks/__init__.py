"""Books of rules: the condition language, reading and testing of books, outcomes and position."""
