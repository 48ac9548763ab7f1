import type { Check } from '@/lib/air/types'

/** The checks in two columns: name, value against what is asked, passes or fails. */
export function Checks({
  title,
  checks,
  method,
  note,
}: {
  title: string
  checks: readonly Check[]
  method: string
  note?: string
}) {
  return (
    <section className="mt-9 border-t border-ink pt-2">
      <div className="mb-2 flex items-baseline justify-between">
        <h2 className="text-3">{title}</h2>
        <span className="text-2 text-ink-3">Method {method}</span>
      </div>
      <div className="gap-x-12 md:columns-2">
        {checks.map((check) => (
          <div
            key={check.name}
            className="grid break-inside-avoid grid-cols-[minmax(0,1fr)_auto_64px] items-baseline gap-x-[14px] border-t border-rule py-[6px] text-2 max-sm:grid-cols-[minmax(0,1fr)_auto]"
          >
            <span>{check.name}</span>
            <span className="fig text-[12.5px] text-ink-2 max-sm:col-start-1 max-sm:row-start-2">
              {check.found}, {check.asked}
            </span>
            <span className={check.passes ? 'text-right text-ink-3' : 'text-right font-[600] text-silt-ink'}>
              {check.passes ? 'passes' : 'fails'}
            </span>
          </div>
        ))}
      </div>
      {note && <p className="mt-2 max-w-measure text-2 text-ink-2">{note}</p>}
    </section>
  )
}
