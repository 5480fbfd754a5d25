"""Views in words and pictures: HTML, PDF, terminal."""
