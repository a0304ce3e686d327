"""What a careful reader would ask of an evaluated sheet, beyond its mistakes."""
