"""Evaluate magnetic alloys by the B-H loops of ring specimens."""
