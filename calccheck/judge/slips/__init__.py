"""Names the slip: redoes a claim with the mistakes that engineers make, and says which of them give the printed number."""
