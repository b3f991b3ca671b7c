"""Reports: what an examination found, as text, JSON and tables. Takes ``Report`` values, examines nothing itself."""
