"""The database: schema, migrations, reading and writing."""
