"""What the stored energy of a batch's coupons does in the furnace, step by step."""
