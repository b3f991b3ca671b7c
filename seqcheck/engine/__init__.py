"""The method of proof: play once, keep every event's causes, bound the separations, replay the witnesses."""
