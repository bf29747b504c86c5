"""Records: findings and plans as JSON, without the data, and back."""
