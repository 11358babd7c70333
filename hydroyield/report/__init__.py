"""What people and programs read: result.json, tables, the summary in the terminal."""
