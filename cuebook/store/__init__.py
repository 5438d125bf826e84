"""Tables, engine, migrations, reading path and originals: the only package that knows SQL."""
