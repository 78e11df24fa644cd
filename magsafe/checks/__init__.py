"""Floor 4: figures held against ratings and limits: findings, ceiling, sheet."""
