"""What a change did: two texts, two folders or a stored report and a text, held against each other by meaning."""
