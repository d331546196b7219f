"""Small painted or composed widgets that several pages share."""
