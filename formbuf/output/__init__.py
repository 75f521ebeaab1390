"""Results as JSON, CSV, Markdown and tables for the terminal."""
