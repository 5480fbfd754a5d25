"""Parts of the view model, one file for each section of the report: a Review goes in, words and figures come out."""
