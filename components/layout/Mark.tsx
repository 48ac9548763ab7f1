/** The mark: a glass with ebb marks. */
export function Mark() {
  return (
    <svg width="15" height="24" viewBox="0 0 15 24" aria-hidden="true">
      <path
        d="M1 1V19.5Q1 23 4.5 23H10.5Q14 23 14 19.5V1"
        fill="none"
        stroke="var(--ink)"
        strokeWidth="1.6"
      />
      <path d="M2.6 15.5H12.4V19.3Q12.4 21.4 10.3 21.4H4.7Q2.6 21.4 2.6 19.3Z" fill="var(--tide)" />
      <path d="M2.6 4.5H9.5M2.6 9.2H9.5M2.6 12.7H9.5" stroke="var(--tide)" strokeWidth="1.5" />
    </svg>
  )
}
