/** The register's first page, and the list of one kind. */
import { Form, Link } from 'react-router'
import { KIND_FACTS, REGISTER_KINDS, type RegisterKind } from '#app/domain/schemas/register.ts'
import type { RegisterIndex, RegisterList } from '#app/services/register-page.server.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { TextField } from '../ui/field.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { RegisterTableView } from './register-table.tsx'

/** Where a page of the register hangs. */
export function RegisterCrumbs({ kind }: { kind?: RegisterKind }) {
  return (
    <>
      <Link to="/register" className="link">
        Register
      </Link>
      {kind !== undefined && (
        <>
          {' / '}
          <Link to={`/register/${kind}`} className="link">
            {KIND_FACTS[kind].title}
          </Link>
        </>
      )}
    </>
  )
}

/** "a pump", "an instrument". */
export function withArticle(one: string): string {
  return `${/^[aeiou]/.test(one) ? 'an' : 'a'} ${one}`
}

export function RegisterIndexPage({ counts, limitKinds, words, hits }: RegisterIndex) {
  const countOf = (kind: RegisterKind) => (kind === 'limits' ? limitKinds : counts[kind])
  return (
    <>
      <PageHead title="Register">
        What the facility is made of, what holds for it, and who changed it when.
      </PageHead>
      <Search words={words} label="Find a tag, serial number or channel" name="Register" />
      {words !== '' && (
        <Panel title={`Found for “${words}”`}>
          <DataTable
            caption="Found in the register"
            columns={[
              {
                key: 'tag',
                head: 'Name',
                rowHead: true,
                cell: (hit) => (
                  <Link to={hit.to} className="link">
                    {hit.tag}
                  </Link>
                ),
              },
              { key: 'kind', head: 'Kind', cell: (hit) => KIND_FACTS[hit.kind].one },
            ]}
            rows={hits}
            rowKey={({ to, tag }) => `${to} ${tag}`}
            empty="Nothing in the register holds these words. Try a part of the tag, such as 03B."
          />
        </Panel>
      )}
      <Panel title="What there is">
        <ul>
          {REGISTER_KINDS.filter((kind) => kind !== 'supply-sets').map((kind) => (
            <li
              key={kind}
              className="grid grid-cols-[minmax(0,1fr)_auto] gap-x-4 border-b border-rule-2 py-2.5 last:border-b-0 sm:grid-cols-[12rem_minmax(0,1fr)_auto]"
            >
              <Link
                to={`/register/${kind}`}
                className="link col-start-1 row-start-1 justify-self-start font-medium"
              >
                {KIND_FACTS[kind].title}
              </Link>
              <span className="col-span-2 row-start-2 text-sm text-ink-2 sm:col-span-1 sm:col-start-2 sm:row-start-1 sm:text-base">
                {KIND_FACTS[kind].about}
              </span>
              <span className="col-start-2 row-start-1 text-right sm:col-start-3">
                {countOf(kind)}
                {kind === 'circuits' && ` + ${counts['supply-sets']}`}
              </span>
            </li>
          ))}
        </ul>
      </Panel>
    </>
  )
}

export function RegisterListPage({
  kind,
  words,
  total,
  found,
  page,
  pages,
  tables,
  mayEdit,
}: RegisterList & { mayEdit: boolean }) {
  const facts = KIND_FACTS[kind]
  const addable: RegisterKind[] = kind === 'circuits' ? ['circuits', 'supply-sets'] : [kind]
  return (
    <>
      <PageHead
        title={facts.title}
        crumbs={<RegisterCrumbs />}
        actions={
          mayEdit
            ? addable
                .filter((each) => KIND_FACTS[each].tag !== null)
                .map((each) => (
                  <ButtonLink key={each} to={`/register/${each}/new`}>
                    Add {withArticle(KIND_FACTS[each].one)}
                  </ButtonLink>
                ))
            : undefined
        }
      >
        {facts.about}
      </PageHead>
      <Search words={words} label="Words in the list" name={facts.title} all={`/register/${kind}`} />
      <p className="mb-2 text-sm text-ink-2" role="status">
        {words === '' ? `${total} in all` : `${found} of ${total}`}
        {pages > 1 && `, page ${page} of ${pages}`}
      </p>
      {tables.map((table) => (
        <Panel key={table.title} title={table.title}>
          <RegisterTableView table={table} />
        </Panel>
      ))}
      {pages > 1 && <Pages words={words} page={page} pages={pages} />}
    </>
  )
}

function Pages({ words, page, pages }: { words: string; page: number; pages: number }) {
  const address = (to: number) =>
    `?${new URLSearchParams({ ...(words === '' ? {} : { words }), page: String(to) })}`
  return (
    <nav aria-label="Pages of the list" className="flex gap-4 text-sm print:hidden">
      {page > 1 && (
        <Link to={address(page - 1)} className="link py-1">
          Page before
        </Link>
      )}
      {page < pages && (
        <Link to={address(page + 1)} className="link py-1">
          Next page
        </Link>
      )}
    </nav>
  )
}

function Search({
  words,
  label,
  name,
  all = '/register',
}: {
  words: string
  label: string
  name: string
  all?: string
}) {
  return (
    <Form
      // The key makes the field follow the address when one goes back.
      key={words}
      method="get"
      role="search"
      aria-label={name}
      className="mb-2 grid items-end gap-x-4 sm:grid-cols-[minmax(0,24rem)_auto] print:hidden"
    >
      <TextField name="words" label={label} type="search" defaultValue={words} maxLength={80} />
      <div className="mb-4 flex items-center gap-3">
        <Button>Find</Button>
        {words !== '' && (
          <Link to={all} className="link py-1">
            All
          </Link>
        )}
      </div>
    </Form>
  )
}
