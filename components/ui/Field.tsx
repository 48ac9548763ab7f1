import {
  type InputHTMLAttributes,
  type ReactNode,
  type Ref,
  type SelectHTMLAttributes,
  type TextareaHTMLAttributes,
  useId,
} from 'react'
import { cx } from './cx'

const box =
  'w-full rounded-2 border bg-leaf text-ink px-3 text-3 max-sm:text-[16px] placeholder:text-ink-3 aria-invalid:border-silt border-edge'

type Around = {
  label: ReactNode
  /** one line under the field that helps to fill it in */
  hint?: ReactNode
  /** what is wrong, in words that say the remedy */
  error?: string
  /** figures and codes in the mono face */
  figures?: boolean
}

type Described = { id: string; 'aria-describedby'?: string; 'aria-invalid'?: true }

/** Label over the field, hint or error under it; the field itself is drawn by `children` with the ids it must carry. */
export function FieldFrame({
  label,
  hint,
  error,
  children,
}: Around & { children: (ids: Described) => ReactNode }) {
  const id = useId()
  const noteId = `${id}-note`
  const ids: Described = {
    id,
    ...(hint || error ? { 'aria-describedby': noteId } : {}),
    ...(error ? { 'aria-invalid': true as const } : {}),
  }
  return (
    <div className="not-first:mt-4">
      <label htmlFor={id} className="mb-[5px] block text-2 font-[600]">
        {label}
      </label>
      {children(ids)}
      {(error || hint) && (
        <p
          id={noteId}
          className={cx('mt-[5px] text-2', error ? 'text-silt-ink' : 'text-ink-3')}
          role={error ? 'alert' : undefined}
        >
          {error ?? hint}
        </p>
      )}
    </div>
  )
}

type Input = Around & InputHTMLAttributes<HTMLInputElement> & { ref?: Ref<HTMLInputElement> }

/** A one-line field. Takes what react-hook-form's register gives. */
export function Field({ label, hint, error, figures, className, ...input }: Input) {
  return (
    <FieldFrame label={label} hint={hint} error={error}>
      {(ids) => (
        <input
          {...ids}
          {...input}
          className={cx(box, 'h-control max-sm:h-[46px]', figures && 'fig', className)}
        />
      )}
    </FieldFrame>
  )
}

type Area = Around & TextareaHTMLAttributes<HTMLTextAreaElement> & { ref?: Ref<HTMLTextAreaElement> }

/** A field of several lines. */
export function TextArea({ label, hint, error, figures, className, rows = 3, ...area }: Area) {
  return (
    <FieldFrame label={label} hint={hint} error={error}>
      {(ids) => (
        <textarea
          {...ids}
          {...area}
          rows={rows}
          className={cx(box, 'block resize-y py-[9px]', figures && 'fig', className)}
        />
      )}
    </FieldFrame>
  )
}

type Choice = Around & SelectHTMLAttributes<HTMLSelectElement> & { ref?: Ref<HTMLSelectElement> }

/** A choice from a list; the options are its children. */
export function Select({ label, hint, error, figures, className, children, ...select }: Choice) {
  return (
    <FieldFrame label={label} hint={hint} error={error}>
      {(ids) => (
        <select
          {...ids}
          {...select}
          className={cx(box, 'h-control max-sm:h-[46px]', figures && 'fig', className)}
        >
          {children}
        </select>
      )}
    </FieldFrame>
  )
}

type RadioProps = InputHTMLAttributes<HTMLInputElement> & {
  ref?: Ref<HTMLInputElement>
  words: ReactNode
  aside?: ReactNode
}

/** One of several choices, each on its own ruled row; put them in a fieldset with a legend. */
export function RadioRow({ words, aside, ...input }: RadioProps) {
  return (
    <label className="flex cursor-pointer items-start gap-[10px] border-t border-rule py-[9px] text-[15px] leading-[1.4] first-of-type:border-t-0 max-sm:min-h-[48px] max-sm:py-3">
      <input type="radio" {...input} className="mt-[3px] size-4 flex-none accent-(--tide)" />
      <span>
        {words} {aside && <span className="text-2 text-ink-3">{aside}</span>}
      </span>
    </label>
  )
}
