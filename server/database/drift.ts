import type { DataSource, EntityMetadata, QueryRunner } from 'typeorm';

/** Tables that have no entity on purpose. */
const TABLES_OF_OTHERS = new Set([
  'migrations', // TypeORM's list of what ran
  'typeorm_metadata', // TypeORM's notes on generated columns
  'rate_limit', // its layout is the rate limiter's, which reads and writes it by itself
]);

/**
 * Compares the migrated schema with the entities and returns one line for every difference, none when
 * they agree. For a throw-away database only: it writes into TypeORM's own notes.
 *
 * TypeORM's schema comparison finds tables, columns, types, defaults and missing keys. What it does not
 * look at is compared here: tables without an entity, the columns of the partitioned table, and what the
 * constraints and indexes say (TypeORM only compares their names).
 */
export async function findDrift(dataSource: DataSource): Promise<string[]> {
  await noteGenerationExpressions(dataSource);
  const statements = await dataSource.driver.createSchemaBuilder().log();
  return [
    ...statements.upQueries.map(({ query }) => query),
    ...(await findTablesWithoutEntity(dataSource)),
    ...(await findColumnDrift(dataSource)),
    ...(await findDefinitionDrift(dataSource)),
  ];
}

/** TypeORM does not read a generated column's expression from the catalogue but from its own notes. */
async function noteGenerationExpressions(dataSource: DataSource): Promise<void> {
  await dataSource.query(`DELETE FROM typeorm_metadata`);
  await dataSource.query(`
    INSERT INTO typeorm_metadata (type, database, schema, "table", name, value)
    SELECT 'GENERATED_COLUMN', table_catalog, table_schema, table_name, column_name, generation_expression
    FROM information_schema.columns WHERE table_schema = 'public' AND is_generated = 'ALWAYS'`);
}

async function findTablesWithoutEntity(dataSource: DataSource): Promise<string[]> {
  const known = new Set(dataSource.entityMetadatas.map((metadata) => metadata.tableName));
  const tables: { name: string }[] = await dataSource.query(`
    SELECT relname AS name FROM pg_class
    WHERE relnamespace = 'public'::regnamespace AND relkind IN ('r', 'p') AND NOT relispartition
    ORDER BY relname`);
  return tables
    .filter(({ name }) => !known.has(name) && !TABLES_OF_OTHERS.has(name))
    .map(({ name }) => `Table ${name} has no entity.`);
}

/** The columns of the tables that TypeORM is told to leave alone. */
async function findColumnDrift(dataSource: DataSource): Promise<string[]> {
  const drift: string[] = [];
  for (const metadata of dataSource.entityMetadatas.filter(({ synchronize }) => !synchronize)) {
    const rows: { name: string; type: string }[] = await dataSource.query(
      `SELECT attname AS name, format_type(atttypid, atttypmod) || CASE WHEN attnotnull THEN ' not null' ELSE '' END AS type
       FROM pg_attribute WHERE attrelid = to_regclass($1) AND attnum > 0 AND NOT attisdropped`,
      [metadata.tableName],
    );
    const inDatabase = new Map(rows.map(({ name, type }) => [name, type]));
    const inEntity = new Map(
      metadata.columns.map((column) => [
        column.databaseName,
        dataSource.driver.normalizeType(column) + (column.isNullable ? '' : ' not null'),
      ]),
    );
    for (const name of new Set([...inDatabase.keys(), ...inEntity.keys()])) {
      const database = inDatabase.get(name) ?? 'missing';
      const entity = inEntity.get(name) ?? 'missing';
      if (database !== entity) {
        drift.push(
          `Column ${metadata.tableName}.${name}: ${database} in the database, ${entity} in the entity.`,
        );
      }
    }
  }
  return drift;
}

interface Definition {
  table: string;
  name: string;
  /** How the entity would write it, with PROBE as its name. */
  statement: string;
  kind: 'constraint' | 'index';
}

/** The name under which an entity's definition is written for a moment, to read it as the database does. */
const PROBE = 'drift_probe';

/**
 * Writes each constraint and index as the entity states it, reads back both in the database's own words
 * and compares. Rolled back in the end; the tables of a throw-away database are empty, so this is quick.
 */
async function findDefinitionDrift(dataSource: DataSource): Promise<string[]> {
  const queryRunner = dataSource.createQueryRunner();
  await queryRunner.connect();
  await queryRunner.startTransaction();
  try {
    const drift: string[] = [];
    for (const metadata of dataSource.entityMetadatas) {
      if (!(await queryRunner.hasTable(metadata.tableName))) continue;
      for (const index of metadata.indices.filter(({ synchronize }) => !synchronize)) {
        if ((await readDefinition(queryRunner, 'index', metadata.tableName, index.name)) === undefined) {
          drift.push(`Index ${index.name} is missing.`);
        }
      }
      for (const definition of definitionsOf(metadata)) {
        drift.push(...(await compareDefinition(queryRunner, definition)));
      }
    }
    return drift;
  } finally {
    await queryRunner.rollbackTransaction();
    await queryRunner.release();
  }
}

function definitionsOf(metadata: EntityMetadata): Definition[] {
  const table = metadata.tableName;
  const constraint = (name: string, text: string): Definition => ({
    table,
    name,
    kind: 'constraint',
    statement: `ALTER TABLE "${table}" ADD CONSTRAINT ${PROBE} ${text}`,
  });
  return [
    ...metadata.checks.map(({ name, expression }) => constraint(name, `CHECK (${expression})`)),
    ...metadata.exclusions.map(({ name, expression }) => constraint(name, `EXCLUDE ${expression}`)),
    ...metadata.foreignKeys.map((key) =>
      constraint(
        key.name,
        `FOREIGN KEY (${quoted(key.columnNames)}) REFERENCES "${key.referencedEntityMetadata.tableName}"
         (${quoted(key.referencedColumnNames)}) ON DELETE ${key.onDelete ?? 'NO ACTION'}`,
      ),
    ),
    ...metadata.indices
      .filter(({ synchronize }) => synchronize)
      .map((index): Definition => {
        const columns = quoted(index.columns.map((column) => column.databaseName));
        const statement = `CREATE ${index.isUnique ? 'UNIQUE ' : ''}INDEX ${PROBE} ON "${table}" (${columns})`;
        return { table, name: index.name, kind: 'index', statement };
      }),
  ];
}

async function compareDefinition(queryRunner: QueryRunner, definition: Definition): Promise<string[]> {
  const { table, name, kind, statement } = definition;
  const database = await readDefinition(queryRunner, kind, table, name);
  await queryRunner.query('SAVEPOINT before_probe');
  let entity: string | undefined;
  try {
    await queryRunner.query(statement);
    entity = await readDefinition(queryRunner, kind, table, PROBE);
  } catch (error) {
    // The entity speaks of a column that is not there, or compares what cannot be compared.
    entity = `not possible (${error instanceof Error ? error.message : String(error)})`;
  }
  await queryRunner.query('ROLLBACK TO SAVEPOINT before_probe');
  if (database === entity) return [];
  return [`${table}, ${kind} ${name}: ${database ?? 'missing'} in the database, ${entity} in the entity.`];
}

async function readDefinition(
  queryRunner: QueryRunner,
  kind: Definition['kind'],
  table: string,
  name: string,
): Promise<string | undefined> {
  const rows: { definition: string }[] = await queryRunner.query(
    kind === 'constraint'
      ? `SELECT pg_get_constraintdef(oid) AS definition FROM pg_constraint
         WHERE conrelid = to_regclass(quote_ident($1)) AND conname = $2`
      : `SELECT replace(pg_get_indexdef(indexrelid), $2, '') AS definition FROM pg_index
         WHERE indrelid = to_regclass(quote_ident($1)) AND indexrelid::regclass::text = $2`,
    [table, name],
  );
  return rows[0]?.definition;
}

function quoted(names: string[]): string {
  return names.map((name) => `"${name}"`).join(', ');
}
