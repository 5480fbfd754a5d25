"""What a verdict rests on beside the ranges of its signals: what the models of the blocks are good for."""
