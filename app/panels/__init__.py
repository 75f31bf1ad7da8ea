"""Side panels: what the layout holds, as forms and tables that edit it."""
