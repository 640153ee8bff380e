"""What one sees: selection, derived arrays, figures, and the widgets that draw them."""
