"""`front3d view`: the scene and a chart of one front side by side, in a window or as a picture."""
