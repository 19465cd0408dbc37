"""The pages for a browser, and what they are made of."""
