/** What a bake left behind, against what was planned, and the outgassing that follows from it. */
import { Form, useNavigation } from 'react-router'
import { powerText } from '#app/domain/power-text.ts'
import type { BakeAfterwards } from '#app/services/bake-afterwards.server.ts'
import { Button } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Facts, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'

const COLUMNS: readonly Column<BakeAfterwards['plan'][number]>[] = [
  { key: 'name', head: 'Step', rowHead: true, cell: ({ name }) => name },
  { key: 'planned', head: 'Planned', cell: ({ planned }) => planned },
  { key: 'actual', head: 'As it ran', cell: ({ actual }) => actual },
]

export function AfterwardsPanel({
  gauge,
  before,
  after,
  improvement,
  offer,
  noOffer,
  revision,
  plan,
  mayAccept,
}: BakeAfterwards & { mayAccept: boolean }) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Panel title="Afterwards">
      <div className="grid gap-x-8 md:grid-cols-2">
        <div>
          <Facts
            items={[
              {
                name: `${gauge}, the day before`,
                value: <Pressure pa={before?.pa ?? null} reason="too few readings" />,
              },
              {
                name: `${gauge}, settled`,
                value: <Pressure pa={after?.pa ?? null} reason="too few readings" />,
              },
              {
                name: 'Improvement',
                value: improvement === null ? 'cannot be told' : `${improvement.toPrecision(2)} times`,
              },
            ]}
          />
          <p className="text-sm text-ink-2">
            Nitrogen-equivalent means of a day each, on the pump that stood there then
            {after !== null && (
              <>
                ; settled means from <Instant at={after.from} /> on, three days after the tube was cold
              </>
            )}
            . A leak shows in both and does not improve by baking.
          </p>
        </div>
        <div>
          {offer === null ? (
            <p>No outgassing is offered. {noOffer}</p>
          ) : (
            <>
              <Facts
                items={[
                  {
                    name:
                      offer.field === 'hydrogenC0'
                        ? 'Hydrogen in the wall, fitted'
                        : 'Hydrogen outgassing, fitted',
                    value: `${figure(offer.fitted)} ± ${figure(offer.error)} ${offer.unit}`,
                  },
                  { name: 'In the register', value: `${figure(offer.held)} ${offer.unit}` },
                ]}
              />
              <p className="mb-2 text-sm text-ink-2">
                If all that {gauge} reads is hydrogen. The error is that of the gauge's sensitivity (15 %,
                common practice) and the scatter of the hours.
              </p>
              {mayAccept && (
                <Form method="post" className="print:hidden">
                  <input type="hidden" name="intent" value="accept" />
                  <input type="hidden" name="revision" value={revision} />
                  <Button disabled={sending}>Make it the register's figure</Button>
                </Form>
              )}
            </>
          )}
        </div>
      </div>
      <div className="mt-3">
        <DataTable
          caption="Plan against what happened"
          captionShown
          columns={COLUMNS}
          rows={plan}
          rowKey={({ name }) => name}
          empty="Neither a plan nor limits of the site say what was meant."
        />
      </div>
    </Panel>
  )
}

function figure(value: number): string {
  return powerText(value, 2)
}
