"""What the user wrote, turned into what is solved: case file, shapes, layout, mesh."""
