"""The live side: one LiveCondition and the exhibits that follow it. No physics here."""
