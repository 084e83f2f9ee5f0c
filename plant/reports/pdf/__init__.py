"""From frozen content to the bytes of a PDF. Pure: it knows reportlab and the scenes, nothing of Django or of the works."""
