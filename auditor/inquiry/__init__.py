"""From open questions to checked claims: the loop, its rounds, and the workers that answer."""
