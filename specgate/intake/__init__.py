"""YAML files to a Project, or to everything that is wrong with them."""
