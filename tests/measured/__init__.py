"""Open measured data of cooling drinks, and a mug of one size that is set beside them."""
