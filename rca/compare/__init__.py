"""Many cases side by side: incidents, what recurs, what is alike, what helped."""
