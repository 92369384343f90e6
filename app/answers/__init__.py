"""The parts of an answer, one module each; `app.engine` gathers them."""
