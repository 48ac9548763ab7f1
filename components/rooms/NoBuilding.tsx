import { LevelGlass } from '@/components/ui/LevelGlass'
import { EmptyState } from '@/components/ui/States'

/** No building in scope, or a building without rooms: what that means and who can help. */
export function NoBuilding({ building }: { building: string | null }) {
  const drawing = <LevelGlass state="no signal" level={null} widthPx={36} heightPx={136} lipPx={7} />
  return (
    <div className="pt-10">
      {building ? (
        <EmptyState title={`${building} has no rooms yet`} drawing={drawing}>
          <p>Rooms are entered by an administrator. Once one has a sensor, it stands here and lives.</p>
        </EmptyState>
      ) : (
        <EmptyState title="No building is yours to see" drawing={drawing}>
          <p>
            Your account is in order, but it is not placed in any building. Ask your administrator for one.
          </p>
        </EmptyState>
      )}
    </div>
  )
}
