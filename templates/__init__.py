"""Report templates, styles and fonts that ship with specgate."""
