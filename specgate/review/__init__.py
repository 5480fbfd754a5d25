"""All of it for one Project: the Review that reports and exchange formats show."""
