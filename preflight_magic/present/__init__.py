"""What a person sees: cards, pictures, HTML, text and widgets."""
