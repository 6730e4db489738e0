"""The study: what is asked, of which models, where on earth, and when."""
